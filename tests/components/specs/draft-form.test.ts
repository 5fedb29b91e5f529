import { describe, expect, it } from 'vitest';
import {
  formOf,
  newRule,
  numberOf,
  readDraft,
  ruleSubjects,
  type DraftForm,
} from '../../../src/components/specs/draft-form.ts';
import { startingSpecs } from '../../../src/domain/starting-specs.ts';
import { r128Body } from '../../factories/world.ts';

const faultsOf = (change: (form: DraftForm) => void): Record<string, string> => {
  const form = formOf(r128Body, '');
  change(form);
  const read = readDraft(form);
  return 'faults' in read ? read.faults : {};
};

describe('the form of a draft', () => {
  it('gives back the body that it was filled with', () => {
    for (const body of [r128Body, ...startingSpecs.map((spec) => spec.body)])
      expect(readDraft(formOf(body, 'A note'))).toEqual({ draft: { body, changeNote: 'A note' } });
  });

  it('offers every subject as a rule that can be saved as it comes, each under an id of its own', () => {
    const rules = ruleSubjects.reduce<DraftForm['rules']>(
      (made, subject) => [
        ...made,
        newRule(
          subject,
          made.map(({ id }) => id),
        ),
      ],
      [],
    );
    const again = newRule(
      'truePeakDbtp',
      rules.map(({ id }) => id),
    );
    expect(readDraft({ ...formOf(r128Body, ''), rules: [...rules, again] })).toHaveProperty('draft');
    expect(again.id).toBe('true-peak-2');
  });

  it.each([
    ['\u221223,5', -23.5],
    ['-1', -1],
    [' 0.25 ', 0.25],
    ['', null],
    ['loud', Number.NaN],
    ['1e3', Number.NaN],
  ])('reads %j as a number', (text, expected) => {
    expect(numberOf(text)).toBe(expected);
  });

  it('says what is wrong at the input that is at fault', () => {
    expect(faultsOf((form) => (form.rules[0].targetLufs = 'loud'))).toEqual({
      'rules.0.targetLufs': 'Write a number, such as \u221223 or 0.5.',
    });
    expect(faultsOf((form) => (form.rules[0].targetLufs = ''))).toHaveProperty(['rules.0.targetLufs']);
    expect(faultsOf((form) => (form.rules[0].toleranceAboveLu = '99'))).toEqual({
      'rules.0.toleranceAboveLu': 'Not above 30.0.',
    });
    expect(faultsOf((form) => (form.rules[1].atMost = ''))).toEqual({
      'rules.1.atMost': 'Give a lower limit, an upper limit, or both.',
    });
    expect(faultsOf((form) => (form.rules[1].atLeast = '5'))).toEqual({
      'rules.1.atMost': 'The lower limit must not be above the upper one.',
    });
    expect(faultsOf((form) => (form.source.edition = 'V5'))).toEqual({
      'source.document': 'Write something here.',
    });
    expect(faultsOf((form) => (form.rules = []))).toHaveProperty('rules');
  });
});
