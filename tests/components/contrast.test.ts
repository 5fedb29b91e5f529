import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

const css = readFileSync(new URL('../../src/styles/global.css', import.meta.url), 'utf8');
const tokensOf = (selector: string): Record<string, string> => {
  const block = css.slice(css.indexOf(selector)).split('}')[0];
  return Object.fromEntries([...block.matchAll(/--([a-z-]+): (#[0-9a-f]{6});/g)].map((m) => [m[1], m[2]]));
};
const themes = {
  paper: tokensOf(':root {'),
  night: tokensOf(":root[data-theme='night'] {"),
  'night by the system': tokensOf(":root:not([data-theme='paper']) {"),
};

/** WCAG 2.2, "relative luminance" and "contrast ratio". */
const luminance = (hex: string) => {
  const [r, g, b] = [1, 3, 5]
    .map((at) => parseInt(hex.slice(at, at + 2), 16) / 255)
    .map((c) => (c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4));
  return 0.2126 * r + 0.7152 * g + 0.0722 * b;
};
const contrast = (a: string, b: string) => {
  const [high, low] = [luminance(a), luminance(b)].sort((x, y) => y - x);
  return (high + 0.05) / (low + 0.05);
};

describe.each(Object.entries(themes))('%s', (_, token) => {
  // WCAG 2.2, 1.4.3 (AA): 4.5 to 1 for text of this size.
  const pairs = [
    ...['ground', 'sheet', 'pick'].flatMap((under) =>
      ['ink', 'muted', 'hull', 'brass', 'teal'].map((text) => [text, under]),
    ),
    ['ink', 'hull-wash'],
    ['hull', 'hull-wash'],
    ['ink', 'brass-wash'],
    ['ink', 'water'],
    ['sheet', 'ink'],
    ['sheet', 'hull'],
    ['sheet', 'brass'],
  ];
  it.each(pairs)('%s is legible on %s', (text, under) => {
    expect(contrast(token[text], token[under])).toBeGreaterThanOrEqual(4.5);
  });
});

it('has the same night whether the switch or the system asks for it', () => {
  expect(themes['night by the system']).toEqual(themes.night);
});
