/** What the review queue asks the server for, and what can be done with the rows that it shows. Pure. */
import type { SubmissionRow } from '@/domain/api/submissions.ts';
import type { RuleVerdict } from '@/domain/verdict.ts';
import { submissionStateNames } from '@/domain/vocabulary.ts';

/** Which submissions are shown: a distributor begins with its queue, a supplier with everything it put in. */
export const shows = ['awaiting', 'decided', 'all'] as const;
export type Show = (typeof shows)[number];
export const showNames: Record<Show, string> = {
  awaiting: 'Awaiting a decision',
  decided: 'Decided',
  all: 'All',
};
const statesOf: Record<Show, string | null> = {
  awaiting: 'awaiting_review',
  decided: 'approved,approved_with_waiver,rejected',
  all: null,
};

export const showOf = (params: URLSearchParams, decides: boolean): Show =>
  shows.find((show) => show === params.get('show')) ?? (decides ? 'awaiting' : 'all');

const passedOn = ['q', 'verdict', 'channel', 'supplier', 'sort', 'order'];

/** The search of /api/v1/submissions for the search of the page. */
export function apiSearch(params: URLSearchParams, decides: boolean): URLSearchParams {
  const search = new URLSearchParams();
  for (const name of passedOn) {
    const value = params.get(name);
    if (value) search.set(name, value);
  }
  const states = statesOf[showOf(params, decides)];
  if (states) search.set('state', states);
  return search;
}

export const rowName = (row: Pick<SubmissionRow, 'programmeTitle' | 'episodeLabel' | 'fileName'>): string =>
  [row.programmeTitle, row.episodeLabel].filter(Boolean).join(' ') || row.fileName;

/** Why the caller cannot decide on it, as a sentence; `null` when they can. */
export function whyNoDecision(row: Pick<SubmissionRow, 'state' | 'ownUpload' | 'decidedBy'>): string | null {
  if (row.state !== 'awaiting_review')
    return `${submissionStateNames[row.state]}${row.decidedBy ? ` by ${row.decidedBy.name}` : ''}: there is nothing to decide.`;
  return row.ownUpload ? 'You uploaded this file yourself, so somebody else decides on it.' : null;
}

/** Rows that may be approved together, unseen: those that pass. What only advises is looked at one by one. */
export const approvableTogether = (rows: readonly SubmissionRow[]): SubmissionRow[] =>
  rows.filter((row) => row.verdict.outcome === 'pass' && whyNoDecision(row) === null);

export const decidable = (rows: readonly SubmissionRow[]): SubmissionRow[] =>
  rows.filter((row) => whyNoDecision(row) === null);

export const failingRules = ({ verdict }: Pick<SubmissionRow, 'verdict'>): RuleVerdict[] =>
  verdict.rules.filter((rule) => rule.outcome === 'fail');

export const worstRule = ({ verdict }: Pick<SubmissionRow, 'verdict'>): RuleVerdict | null =>
  verdict.rules.find((rule) => rule.ruleId === verdict.nearestRuleId) ?? null;

/** Names of rules that fail in any of the rows, each once, in their order. */
export const failingNames = (rows: readonly SubmissionRow[]): string[] => [
  ...new Set(rows.flatMap((row) => failingRules(row).map(({ name }) => name))),
];

/** 'picked 31: 28 pass, 3 advisory'. */
export function pickedText(rows: readonly SubmissionRow[]): string {
  const count = (outcome: string) => rows.filter((row) => row.verdict.outcome === outcome).length;
  const parts = [
    [count('pass'), 'pass'],
    [count('advisory'), 'advisory'],
    [count('fail'), 'fail'],
  ].flatMap(([n, word]) => (n ? [`${n} ${word}`] : []));
  return `picked ${rows.length}: ${parts.join(', ')}`;
}

/** '42 await a decision, 6 air within a day'. */
export function countsText({
  awaiting,
  airingWithin24h,
}: {
  awaiting: number;
  airingWithin24h: number;
}): string {
  const wait =
    awaiting === 1 ? '1 awaits a decision' : `${awaiting === 0 ? 'none' : awaiting} await a decision`;
  if (awaiting === 0 || airingWithin24h === 0) return wait;
  return `${wait}, ${airingWithin24h} air${airingWithin24h === 1 ? 's' : ''} within a day`;
}

/** A moment in the channel's zone, with the zone: '20:00 GMT' today, 'Thu 20:00 GMT' in the next days, 'Tue 8 Dec 20:00 GMT'. */
export function momentText(moment: string, timeZone: string, now: Date): string {
  const partsOf = (date: Date) => {
    const parts = new Intl.DateTimeFormat('en-GB', {
      timeZone,
      weekday: 'short',
      day: 'numeric',
      month: 'short',
      year: 'numeric',
      hour: '2-digit',
      minute: '2-digit',
      hourCycle: 'h23',
      timeZoneName: 'short',
    }).formatToParts(date);
    return Object.fromEntries(parts.map(({ type, value }) => [type, value]));
  };
  const at = partsOf(new Date(moment));
  const today = partsOf(now);
  const time = `${at.hour}:${at.minute} ${at.timeZoneName}`;
  if (at.day === today.day && at.month === today.month && at.year === today.year) return time;
  const days = (Date.parse(moment) - now.getTime()) / 86_400_000;
  // Within the next days the weekday is enough.
  if (days > 0 && days < 6) return `${at.weekday} ${time}`;
  const day = `${at.weekday} ${at.day} ${at.month}`;
  return at.year === today.year ? `${day} ${time}` : `${day} ${at.year} ${time}`;
}

/** Name of the form field that holds the reason of a rule's waiver. */
export const waiverField = (ruleId: string): string => `waive:${ruleId}`;

/** Everybody but oneself: a live event tells of all who have it open. */
export const withoutMe = (openBy: SubmissionRow['openBy'], ownUserId: string): SubmissionRow['openBy'] =>
  openBy.filter(({ id }) => id !== ownUserId);
