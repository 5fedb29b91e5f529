import { outcomeNames, type Outcome } from '@/domain/vocabulary.ts';

const tones: Record<Outcome, string> = {
  pass: 'text-ink',
  advisory: 'text-brass',
  fail: 'text-hull',
  not_judged: 'text-muted',
};
/** A level bar, a tilted one, a broken one, an open one: the verdict reads without colour. */
const bars: Record<Outcome, React.ReactNode> = {
  pass: <path d="M1 7h14" stroke="currentColor" strokeWidth="2.6" />,
  advisory: <path d="M1 9.5 15 4.5" stroke="currentColor" strokeWidth="2.6" />,
  fail: <path d="M1 4.5h6M9 9.5h6" stroke="currentColor" strokeWidth="2.6" />,
  not_judged: <path d="M1.5 5.5h13v3h-13z" stroke="currentColor" strokeWidth="1.2" fill="none" />,
};

/** A verdict: a word with a shape. Only what needs a person is coloured. */
export function VerdictMark({ outcome, wordless = false }: { outcome: Outcome; wordless?: boolean }) {
  return (
    <span
      className={`inline-flex items-center gap-[7px] align-middle leading-none font-semibold whitespace-nowrap ${tones[outcome]}`}
    >
      <svg width="16" height="14" viewBox="0 0 16 14" aria-hidden="true">
        {bars[outcome]}
      </svg>
      <span className={wordless ? 'sr-only' : undefined}>{outcomeNames[outcome]}</span>
    </span>
  );
}

/** Colour of a figure or margin that ends so. */
export const outcomeTone = (outcome: Outcome): string =>
  outcome === 'pass' || outcome === 'not_judged' ? 'text-muted' : `${tones[outcome]} font-semibold`;
