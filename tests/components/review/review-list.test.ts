// What the review queue makes of its rows: pure, so without a browser.
import { describe, expect, it } from 'vitest';
import { changesBetween } from '../../../src/components/review/changes.ts';
import {
  apiSearch,
  approvableTogether,
  countsText,
  failingNames,
  momentText,
  pickedText,
  showOf,
  whyNoDecision,
} from '../../../src/components/review/review-list.ts';
import type { SubmissionRow } from '../../../src/domain/api/submissions.ts';
import type { OverallOutcome } from '../../../src/domain/vocabulary.ts';
import { figures } from '../../factories/world.ts';

const rule = (ruleId: string, outcome: 'pass' | 'fail', name = ruleId) => ({ ruleId, name, outcome });
function row(
  outcome: OverallOutcome,
  given: Partial<SubmissionRow> = {},
  rules = [rule('peak', 'pass')],
): SubmissionRow {
  return {
    state: 'awaiting_review',
    ownUpload: false,
    decidedBy: null,
    verdict: { outcome, rules, nearestRuleId: null, nearestText: '', rounding: 'shown' },
    ...given,
  } as SubmissionRow;
}

describe('approving together', () => {
  it('takes only passes: neither what advises, nor fails, nor is decided, nor was uploaded by oneself', () => {
    const pass = row('pass');
    const rows = [
      pass,
      row('advisory'),
      row('fail'),
      row('pass', { state: 'approved' }),
      row('pass', { ownUpload: true }),
    ];
    expect(approvableTogether(rows)).toEqual([pass]);
  });

  it('says why a row cannot be decided on', () => {
    expect(whyNoDecision(row('pass'))).toBeNull();
    expect(whyNoDecision(row('pass', { ownUpload: true }))).toBe(
      'You uploaded this file yourself, so somebody else decides on it.',
    );
    const decidedBy = { id: '00000000-0000-4000-8000-000000000001', name: 'Perrin Vale' };
    expect(whyNoDecision(row('pass', { state: 'rejected', decidedBy }))).toBe(
      'Rejected by Perrin Vale: there is nothing to decide.',
    );
  });

  it('counts the picked by verdict and names each failing rule once', () => {
    const peak = rule('peak', 'fail', 'Maximum true peak');
    const fails = row('fail', {}, [peak, rule('range', 'pass', 'Loudness range')]);
    expect(pickedText([row('pass'), row('pass'), fails])).toBe('picked 3: 2 pass, 1 fail');
    expect(failingNames([fails, row('fail', {}, [peak])])).toEqual(['Maximum true peak']);
  });
});

describe('the head of the queue', () => {
  it.each([
    [{ awaiting: 42, airingWithin24h: 6 }, '42 await a decision, 6 air within a day'],
    [{ awaiting: 1, airingWithin24h: 1 }, '1 awaits a decision, 1 airs within a day'],
    [{ awaiting: 3, airingWithin24h: 0 }, '3 await a decision'],
    [{ awaiting: 0, airingWithin24h: 0 }, 'none await a decision'],
  ])('reads %o as %s', (counts, text) => expect(countsText(counts)).toBe(text));
});

describe('the address', () => {
  it('begins with the queue for a distributor and with everything for a supplier', () => {
    expect(apiSearch(new URLSearchParams(), true).toString()).toBe('state=awaiting_review');
    expect(apiSearch(new URLSearchParams(), false).toString()).toBe('');
    expect(showOf(new URLSearchParams('show=nonsense'), true)).toBe('awaiting');
  });

  it('passes filters and sort on, and keeps what is of the page only', () => {
    const search = apiSearch(
      new URLSearchParams('show=all&q=gales&sort=truePeak&order=desc&row=1&t=1-2'),
      true,
    );
    expect(Object.fromEntries(search)).toEqual({ q: 'gales', sort: 'truePeak', order: 'desc' });
  });
});

describe('moments in the channel’s zone', () => {
  const now = new Date('2026-12-01T12:00:00Z');
  it.each([
    ['2026-12-01T20:00:00Z', 'Europe/London', '20:00 GMT'],
    ['2026-12-01T23:30:00Z', 'Europe/Berlin', 'Wed 00:30 CET'],
    ['2026-12-08T20:00:00Z', 'Europe/London', 'Tue 8 Dec 20:00 GMT'],
    ['2026-11-30T20:00:00Z', 'Europe/London', 'Mon 30 Nov 20:00 GMT'],
    ['2027-01-02T09:05:00Z', 'Europe/London', 'Sat 2 Jan 2027 09:05 GMT'],
  ])('tells %s at %s as %s', (moment, zone, text) => expect(momentText(moment, zone, now)).toBe(text));
});

describe('the change against the delivery before', () => {
  it('is the difference of the figures as shown, with its sign', () => {
    const before = figures({ integratedLufs: -20.14, maxDbtp: -1.2, rangeLu: null });
    const after = figures({ integratedLufs: -23.06, maxDbtp: -1.2, rangeLu: 4 });
    const of = (metric: string) => changesBetween(before, after).find((one) => one.metric === metric);
    // −20.1 and −23.1 as shown: 3.0, where the full figures differ by 2.92.
    expect(of('integratedLufs')).toMatchObject({
      beforeText: '\u221220.1',
      afterText: '\u221223.1',
      changeText: '\u22123.0',
    });
    expect(of('truePeakDbtp')?.changeText).toBe('unchanged');
    expect(of('rangeLu')?.changeText).toBe('nothing to compare');
  });
});
