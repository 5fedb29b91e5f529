import { describe, expect, it } from 'vitest';
import { measuringPlanSchema, misfitOf } from '../../src/domain/measuring-plan.ts';
import { wholeFile, type MeasuringPlan, type Presentation } from '../../src/engine/plan.ts';
import { orderChoices, splitChoices } from '../../src/engine/presentations.ts';

const pair = (name: string, ...audioChannels: number[]): Presentation => ({
  name,
  audioChannels,
  speakers: ['L', 'R'],
});
const withPresentations = (...presentations: unknown[]) => ({ ...wholeFile, presentations });
const sentences = (plan: unknown) => {
  const read = measuringPlanSchema.safeParse(plan);
  return read.success ? [] : read.error.issues.map(({ message }) => message);
};

describe('a measuring plan', () => {
  it('is accepted for the whole file, a window and every choice that is offered', () => {
    expect(sentences(wholeFile)).toEqual([]);
    expect(sentences({ ...wholeFile, window: { startSeconds: 60, endSeconds: null } })).toEqual([]);
    for (let count = 1; count <= 24; count++)
      for (const { id, presentations } of [...orderChoices(count), ...splitChoices(count)])
        expect(sentences(withPresentations(...presentations)), `${id} of ${count}`).toEqual([]);
  });

  it('lets two presentations share an audio channel, as a person may mean it', () => {
    expect(sentences(withPresentations(pair('Mix', 0, 1), pair('Effects', 0, 2)))).toEqual([]);
  });

  it.each<[string, unknown, RegExp]>([
    ['no presentation', withPresentations(), /one presentation at least/],
    [
      '17 presentations',
      withPresentations(...Array.from({ length: 17 }, (_, i) => pair(`P${i}`, 0, 1))),
      /16 presentations at the most/,
    ],
    ['names alike', withPresentations(pair('Mix', 0, 1), pair('mix', 2, 3)), /same name/],
    ['no name', withPresentations(pair(' ', 0, 1)), /a name/],
    ['an audio channel twice', withPresentations(pair('Mix', 1, 1)), /stands twice/],
    [
      'one loudspeaker too few',
      withPresentations({ ...pair('Mix', 0, 1), speakers: ['L'] }),
      /which loudspeaker/,
    ],
    [
      'a loudspeaker twice',
      withPresentations({ ...pair('Mix', 0, 1), speakers: ['L', 'L'] }),
      /same loudspeaker/,
    ],
    [
      'no such loudspeaker',
      withPresentations({ ...pair('Mix', 0, 1), speakers: ['L', 'X'] }),
      /is one of M, L/,
    ],
    [
      '25 audio channels',
      withPresentations({
        name: 'All',
        audioChannels: Array.from({ length: 25 }, (_, i) => i),
        speakers: Array(25).fill('unknown'),
      }),
      /24 audio channels at the most/,
    ],
    ['half an audio channel', withPresentations(pair('Mix', 0, 1.5)), /whole numbers/],
    ['a stream below 0', { ...wholeFile, stream: -1 }, /streams are counted/],
    [
      'a begin before the file',
      { ...wholeFile, window: { startSeconds: -1, endSeconds: null } },
      /begin before/,
    ],
    [
      'an end before its begin',
      { ...wholeFile, window: { startSeconds: 9, endSeconds: 9 } },
      /must end after/,
    ],
  ])('is refused with a sentence for %s', (_, plan, sentence) => {
    const found = sentences(plan);
    expect(found).toHaveLength(1);
    expect(found[0]).toMatch(sentence);
  });
});

describe('a plan against its file', () => {
  const file = { channels: 6, durationSeconds: 100 };
  const windowed = (startSeconds: number, endSeconds: number | null): MeasuringPlan => ({
    ...wholeFile,
    window: { startSeconds, endSeconds },
  });

  it('fits where all that it names is there, a frame of rounding at the end forgiven', () => {
    expect(misfitOf(wholeFile, file)).toBeNull();
    expect(misfitOf({ ...wholeFile, presentations: [pair('Mix', 4, 5)] }, file)).toBeNull();
    expect(misfitOf(windowed(99.9, 100.04), file)).toBeNull();
  });

  it('says what is missing', () => {
    expect(misfitOf({ ...wholeFile, presentations: [pair('Mix', 5, 6)] }, file)).toMatch(
      /number 7 is not among/,
    );
    expect(misfitOf(windowed(100, null), file)).toMatch(/cannot begin at 100\.000 s/);
    expect(misfitOf(windowed(0, 100.1), file)).toMatch(/cannot end at 100\.100 s/);
  });
});
