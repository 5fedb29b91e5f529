/** The look's tokens as the canvas needs them, read anew when the theme changes. */
const names = [
  'ground',
  'sheet',
  'ink',
  'muted',
  'hairline',
  'hull',
  'brass',
  'teal',
  'water',
  'water-line',
] as const;
export type Colours = Record<(typeof names)[number], string>;

export function readColours(): Colours {
  const style = getComputedStyle(document.documentElement);
  return Object.fromEntries(
    names.map((name) => [name, style.getPropertyValue(`--${name}`).trim()]),
  ) as Colours;
}
