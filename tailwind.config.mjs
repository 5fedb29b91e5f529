// The look's tokens. Colours are CSS variables set per theme in src/styles/global.css; components name only these.
const token = (name) => `var(--${name})`;

/** @type {import('tailwindcss').Config} */
export default {
  theme: {
    colors: {
      transparent: 'transparent',
      current: 'currentColor',
      ground: token('ground'),
      sheet: token('sheet'),
      ink: token('ink'),
      muted: token('muted'),
      hairline: token('hairline'),
      pick: token('pick'),
      hull: token('hull'),
      'hull-wash': token('hull-wash'),
      brass: token('brass'),
      'brass-wash': token('brass-wash'),
      teal: token('teal'),
      water: token('water'),
      'water-line': token('water-line'),
    },
    fontFamily: {
      sans: ['"Schibsted Grotesk Variable"', 'system-ui', 'sans-serif'],
      mono: ['"Sometype Mono Variable"', 'ui-monospace', 'monospace'],
    },
    borderRadius: { none: '0', sm: '1px', DEFAULT: '2px' },
  },
};
