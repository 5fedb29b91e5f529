import { describe, expect, it } from 'vitest';
import { judge } from '../../src/domain/judge.ts';
import { figureBeside, overPresentations, worstOf } from '../../src/domain/presentations-verdict.ts';
import { figures, r128Body, stereoFormat } from '../factories/world.ts';

const verdictOf = (given: Parameters<typeof figures>[0]) =>
  judge({ format: stereoFormat, figures: figures(given), findings: [] }, r128Body);

describe('a verdict over several presentations', () => {
  const right = { name: 'Full mix', verdict: verdictOf({}) };
  const loud = { name: 'M&E', verdict: verdictOf({ integratedLufs: -20 }) };
  const hot = { name: 'Described', verdict: verdictOf({ maxDbtp: 0.4 }) };

  it('is as good as the worst, and names it', () => {
    const verdict = overPresentations([right, loud]);
    expect(verdict.outcome).toBe('fail');
    expect(verdict.nearestText).toBe('integrated 2.5 LU over in M&E');
  });

  it('holds every rule as it ends where it ends worst', () => {
    const { rules } = overPresentations([right, loud, hot]);
    expect(rules.map(({ ruleId, outcome, presentation }) => [ruleId, outcome, presentation])).toEqual([
      ['integrated', 'fail', 'M&E'],
      ['true-peak', 'fail', 'Described'],
      ['range', 'pass', 'Full mix'],
    ]);
    expect(rules.map(({ marginText }) => marginText)).toEqual([
      '2.5 LU over in M&E',
      '1.4 dB over in Described',
      '9.0 LU inside',
    ]);
  });

  it('takes the smaller margin where a rule ends alike in two', () => {
    const louder = { name: 'Louder', verdict: verdictOf({ integratedLufs: -18 }) };
    const [integrated] = overPresentations([loud, louder]).rules;
    expect([integrated.presentation, integrated.judged]).toEqual(['Louder', -18]);
  });

  it('shows the figure that its rule is told of', () => {
    expect(figureBeside(overPresentations([right, loud]), 'integratedLufs', -23)).toBe(-20);
    expect(figureBeside(overPresentations([right]), 'integratedLufs', -23)).toBe(-23);
    expect(figureBeside(null, 'integratedLufs', -23)).toBe(-23);
  });

  it('is the verdict itself where there is one presentation', () => {
    expect(overPresentations([loud])).toEqual(loud.verdict);
    expect(() => overPresentations([])).toThrow();
  });
});

it('takes the first of the worst', () => {
  expect(worstOf([])).toBeNull();
  expect(
    worstOf([
      { outcome: 'advisory', at: 1 },
      { outcome: 'fail', at: 2 },
      { outcome: 'fail', at: 3 },
    ] as const),
  ).toEqual({ outcome: 'fail', at: 2 });
});
