/** What changed between two versions of a spec, rule by rule. */
import { formatLimit } from './figures-text.ts';
import { permittedText, ruleName } from './rule-words.ts';
import type { Rule, SpecBody } from './spec.ts';

export interface SpecChange {
  /** The rule's name, or the setting's. */
  name: string;
  /** In words; `null` where it was not there, or is there no more. */
  was: string | null;
  is: string | null;
}

export const roundingText: Record<SpecBody['rounding'], string> = {
  shown: 'the figure as shown',
  unrounded: 'the full figure',
};
export const monoText: Record<SpecBody['mono'], string> = {
  asOne: 'as one channel',
  asDual: 'as heard on two loudspeakers',
};

/** A rule in one line: 'at most −1.0 dBTP, reject, measurement tolerance 0.3'. */
export function ruleText(rule: Rule, unit: SpecBody['unit']): string {
  return [
    permittedText(rule, unit),
    rule.breach,
    ...(rule.measurementTolerance > 0
      ? [`measurement tolerance ${formatLimit(rule.measurementTolerance)}`]
      : []),
    ...(rule.kind === 'limits' && rule.judgeShortProgrammes ? ['also under 60 s'] : []),
  ].join(', ');
}

/** Settings first, then rules in the order of the newer version, then those that are gone. */
export function specChanges(before: SpecBody, after: SpecBody): SpecChange[] {
  const settings = [
    { name: 'Loudness unit', was: before.unit, is: after.unit },
    { name: 'Judged on', was: roundingText[before.rounding], is: roundingText[after.rounding] },
    { name: 'One-channel files', was: monoText[before.mono], is: monoText[after.mono] },
  ];
  const rules = after.rules.map((rule) => {
    const old = before.rules.find(({ id }) => id === rule.id);
    const name =
      old && ruleName(old) !== ruleName(rule) ? `${ruleName(old)}, now ${ruleName(rule)}` : ruleName(rule);
    // Units of the newer version on both sides: the change of unit is told once, above.
    return { name, was: old ? ruleText(old, after.unit) : null, is: ruleText(rule, after.unit) };
  });
  const gone = before.rules
    .filter(({ id }) => !after.rules.some((rule) => rule.id === id))
    .map((rule) => ({ name: ruleName(rule), was: ruleText(rule, before.unit), is: null }));
  return [...settings, ...rules, ...gone].filter(
    ({ name, was, is }) => was !== is || name.includes(', now '),
  );
}
