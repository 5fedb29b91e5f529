/**
 * Glossary. One meaning each, in code as on the page.
 *
 * - organisation: a tenant; a supplier, a distributor, or both. member: a person in it, with one or more roles.
 * - channel: an outlet of a distributor (a TV service, a radio station, a podcast feed). Never a track of a file:
 *   those are audio channels.
 * - agreement: a supplier's leave to deliver to a channel.
 * - programme / episode: what is delivered. content kind: a channel sets a spec per kind.
 * - deliverable: one uploaded file and its facts. presentation: a group of its audio channels that plays as one.
 * - measurement: figures and series by one engine version. verdict: a measurement held against a spec version.
 * - margin: the distance to the nearest limit; positive inside, negative beyond.
 * - submission: a deliverable put to a channel. excursion: a stretch of time in which a figure is beyond a limit.
 */
import { z } from 'zod';

export const roles = ['mix_engineer', 'qc_operator', 'spec_owner', 'administrator'] as const;
export const roleSchema = z.enum(roles);
export type Role = z.infer<typeof roleSchema>;
export const roleNames: Record<Role, string> = {
  mix_engineer: 'Mix engineer',
  qc_operator: 'QC operator',
  spec_owner: 'Spec owner',
  administrator: 'Administrator',
};

export const contentKinds = [
  'long_form',
  'short_form',
  'trailer',
  'podcast_episode',
  'music_programme',
] as const;
export const contentKindSchema = z.enum(contentKinds);
export type ContentKind = z.infer<typeof contentKindSchema>;
export const contentKindNames: Record<ContentKind, string> = {
  long_form: 'Long form',
  short_form: 'Short form',
  trailer: 'Trailer',
  podcast_episode: 'Podcast episode',
  music_programme: 'Music programme',
};

export const channelKinds = ['television', 'radio', 'podcast', 'online'] as const;
export const channelKindSchema = z.enum(channelKinds);
export type ChannelKind = z.infer<typeof channelKindSchema>;
export const channelKindNames: Record<ChannelKind, string> = {
  television: 'Television',
  radio: 'Radio',
  podcast: 'Podcast',
  online: 'Online',
};

export const deliverableStates = ['uploading', 'waiting', 'measuring', 'measured', 'unreadable'] as const;
export const deliverableStateSchema = z.enum(deliverableStates);
export type DeliverableState = z.infer<typeof deliverableStateSchema>;

export const submissionStates = [
  'awaiting_review',
  'approved',
  'approved_with_waiver',
  'rejected',
  'withdrawn',
  'replaced',
] as const;
export const submissionStateSchema = z.enum(submissionStates);
export type SubmissionState = z.infer<typeof submissionStateSchema>;
export const submissionStateNames: Record<SubmissionState, string> = {
  awaiting_review: 'Awaiting review',
  approved: 'Approved',
  approved_with_waiver: 'Approved with waiver',
  rejected: 'Rejected',
  withdrawn: 'Withdrawn',
  replaced: 'Replaced',
};

export const outcomes = ['pass', 'advisory', 'fail', 'not_judged'] as const;
export const outcomeSchema = z.enum(outcomes);
/** How one rule ends. A whole verdict is never 'not_judged': see MEASUREMENT, Verdicts. */
export type Outcome = z.infer<typeof outcomeSchema>;
export const overallOutcomeSchema = z.enum(['pass', 'advisory', 'fail']);
export type OverallOutcome = z.infer<typeof overallOutcomeSchema>;
export const outcomeNames: Record<Outcome, string> = {
  pass: 'Pass',
  advisory: 'Advisory',
  fail: 'Fail',
  not_judged: 'Not judged',
};
