import { describe, expect, it } from 'vitest';
import {
  columnsOf,
  formOf,
  nextTime,
  planOf,
  withRate,
  type Format,
} from '../../src/components/plan/plan-form.ts';
import { fileClock } from '../../src/domain/file-clock.ts';
import { wholeFile, type MeasuringPlan } from '../../src/engine/plan.ts';
import { splitChoices } from '../../src/engine/presentations.ts';
import { stereoFormat } from '../factories/world.ts';

const format: Format = {
  ...stereoFormat,
  channels: 8,
  layout: '7.1',
  durationSeconds: 120,
  frameRate: '25',
  startTimecode: '10:00:00:00',
};
const plan: MeasuringPlan = {
  stream: 0,
  window: { startSeconds: 10, endSeconds: 110.48 },
  presentations: splitChoices(8)[0].presentations,
};

describe('the form of a plan', () => {
  it('makes the plan that it was made of', () => {
    expect(planOf(formOf(plan, null, format), format)).toEqual({ plan });
    expect(planOf(formOf(wholeFile, null, format), format)).toEqual({ plan: wholeFile });
  });

  it('writes times by the file’s timecode, and leaves its own begin and end empty', () => {
    expect(formOf(plan, null, format)).toMatchObject({ from: '10:00:10:00', to: '10:01:50:12' });
    expect(formOf(wholeFile, null, format)).toMatchObject({ from: '', to: '', choice: 'told' });
    expect(formOf({ ...wholeFile, window: { startSeconds: 0, endSeconds: 60 } }, null, format)).toMatchObject(
      { from: '', to: '10:01:00:00' },
    );
  });

  it('says at which field a fault stands', () => {
    const form = formOf(plan, null, format);
    const faultOf = (change: Partial<typeof form>) => planOf({ ...form, ...change }, format);
    expect(faultOf({ from: '09:00:00:00' })).toMatchObject({ field: 'from' });
    expect(faultOf({ to: 'later' })).toMatchObject({ field: 'to' });
    expect(faultOf({ to: '10:00:05:00' })).toMatchObject({
      field: 'to',
      fault: expect.stringMatching(/after it begins/),
    });
    expect(faultOf({ to: '11:00:00:00' })).toMatchObject({
      field: 'plan',
      fault: expect.stringMatching(/lasts 120\.000 s/),
    });
    const [first, second] = form.columns;
    expect(faultOf({ columns: [first, { ...second, name: '' }] })).toMatchObject({ field: 'presentations' });
    expect(faultOf({ columns: [{ ...first, speakers: first.speakers.map(() => null) }] })).toMatchObject({
      field: 'presentations',
    });
  });

  it('lets an audio channel stand in several presentations, and in none', () => {
    const columns = [
      { name: 'Full mix', speakers: ['L', 'R', null, null, null, null, null, null] as const },
      { name: 'Left alone', speakers: ['M', null, null, null, null, null, null, null] as const },
    ].map(({ name, speakers }) => ({ name, speakers: [...speakers] }));
    const made = planOf({ ...formOf(wholeFile, null, format), choice: 'own', columns }, format);
    expect(made).toMatchObject({
      plan: { presentations: [{ audioChannels: [0, 1] }, { audioChannels: [0], speakers: ['M'] }] },
    });
    expect('plan' in made && columnsOf(made.plan.presentations ?? [], 8)).toEqual(columns);
  });

  it('writes its times anew under another frame rate', () => {
    const plain = { ...format, frameRate: undefined, startTimecode: undefined };
    const form = { ...formOf(wholeFile, null, plain), from: '00:00:10.480', to: 'never' };
    expect(withRate(form, '25', plain)).toMatchObject({ frameRate: '25', from: '00:00:10:12', to: 'never' });
  });
});

it('writes the first time at or after a moment', () => {
  const clock = fileClock(format, null);
  expect(nextTime(clock, 3)).toBe('10:00:03:00');
  expect(nextTime(clock, 3.001)).toBe('10:00:03:01');
  expect(nextTime(fileClock(stereoFormat, null), 3.0002)).toBe('00:00:03.001');
});
