/** Audit events in words: the part after the actor's name ('approved The Tallow Road 1.04 for Harrow One'). */

type Detail = Record<string, unknown>;

const text = (detail: Detail, ...keys: string[]): string | null => {
  for (const key of keys) {
    const value = detail[key];
    if (typeof value === 'string' && value !== '') return value;
    if (typeof value === 'number') return String(value);
  }
  return null;
};

const list = (value: unknown): string =>
  Array.isArray(value) ? value.filter((item) => typeof item === 'string').join(' and ') : '';

/** 'The Tallow Road 1.04', the file's name, or 'a delivery' where the event kept neither. */
function delivery(detail: Detail): string {
  const programme = text(detail, 'programmeTitle');
  if (programme) return [programme, text(detail, 'episodeLabel')].filter(Boolean).join(' ');
  return text(detail, 'title', 'fileName') ?? 'a delivery';
}

const toChannel = (detail: Detail) => {
  const channel = text(detail, 'channelName', 'channel');
  return channel ? ` for ${channel}` : '';
};
const because = (detail: Detail) => {
  const reason = text(detail, 'reason');
  return reason ? `: ${reason}` : '';
};
const version = (detail: Detail) => {
  const number = text(detail, 'number', 'versionNumber', 'specVersionNumber');
  return number ? ` version ${number}` : '';
};
const named = (detail: Detail, otherwise: string) =>
  text(detail, 'name', 'specName', 'channelName') ?? otherwise;

const sentences: Record<string, (detail: Detail) => string> = {
  'deliverable.uploaded': (d) => `uploaded ${delivery(d)}`,
  'deliverable.measured': (d) => `${delivery(d)} was measured`,
  'deliverable.unreadable': (d) => `${delivery(d)} could not be read`,
  'deliverable.discarded': (d) => `discarded ${delivery(d)}`,
  'deliverable.details_changed': (d) => `changed the details of ${delivery(d)}`,
  'deliverable.plan_changed': (d) => `had ${delivery(d)} measured ${text(d, 'plan') ?? 'another way'}`,
  'deliverable.set_made': (d) => `took several files as one: ${delivery(d)}`,
  'upload.aborted': (d) => `gave up the upload of ${delivery(d)}`,
  'member.invited': (d) => `invited ${text(d, 'email') ?? 'somebody'} as ${list(d.roles)}`,
  'member.invitation_taken_back': (d) => `took back the invitation of ${text(d, 'email') ?? 'somebody'}`,
  'member.joined': (d) => `${named(d, 'A new member')} joined as ${list(d.roles)}`,
  'member.roles_changed': (d) => `made ${named(d, 'a member')} ${list(d.to)} (before: ${list(d.from)})`,
  'member.removed': (d) => `removed ${named(d, 'a member')}`,
  'member.sessions_ended': (d) => `ended the sessions of ${named(d, 'a member')}`,
  'member.password_reset': (d) => `${named(d, 'A member')} chose a new password by mail`,
  'submission.submitted': (d) => `submitted ${delivery(d)}${toChannel(d)}`,
  'submission.approved': (d) => `approved ${delivery(d)}${toChannel(d)}`,
  'submission.approved_with_waiver': (d) => `approved ${delivery(d)}${toChannel(d)} with a waiver`,
  'submission.rejected': (d) => `rejected ${delivery(d)}${toChannel(d)}${because(d)}`,
  'submission.withdrawn': (d) => `withdrew ${delivery(d)}${toChannel(d)}`,
  'submission.replaced': (d) => `replaced ${delivery(d)}${toChannel(d)}`,
  'submission.taken_back': (d) => `took back the decision on ${delivery(d)}${toChannel(d)}`,
  'submission.air_date_changed': (d) => `changed the air date of ${delivery(d)}${toChannel(d)}`,
  'submission.note_added': (d) => `wrote a note on ${delivery(d)}${toChannel(d)}`,
  'spec.created': (d) => `made the spec ${named(d, '')}`.trim(),
  'spec.published': (d) => `published ${named(d, 'a spec')}${version(d)}`,
  'spec.draft_discarded': (d) => `discarded the draft of ${named(d, 'a spec')}`,
  'channel.spec_assigned': (d) =>
    `held ${text(d, 'channelName', 'name') ?? 'a channel'} to ${text(d, 'specName') ?? 'a spec'}`,
  'channel.assignment_taken_back': (d) =>
    `took back that ${text(d, 'channelName', 'name') ?? 'a channel'} is held to ${text(d, 'specName') ?? 'a spec'}`,
  'agreement.made': (d) =>
    `gave ${named(d, 'a supplier')} leave to deliver to ${text(d, 'channelName') ?? 'a channel'}`,
  'agreement.ended': (d) => `ended the agreement with ${named(d, 'a supplier')}${toChannel(d)}`,
  'channel.created': (d) => `made the channel ${named(d, '')}`.trim(),
  'channel.changed': (d) => `changed the channel ${named(d, '')}`.trim(),
};

/**
 * One line for an event. Actions without a sentence of their own read as what their name says and of what:
 * 'spec.draft_discarded' of {name: 'Long form'} is 'spec draft discarded: Long form'.
 */
export function activitySentence(action: string, detail: Detail): string {
  const own = Object.hasOwn(sentences, action) ? sentences[action] : undefined;
  if (own) return own(detail);
  const what = text(detail, 'name', 'specName', 'programmeTitle', 'title', 'fileName', 'channelName');
  const plain = action.replace(/[._]/g, ' ');
  return what ? `${plain}: ${what}` : plain;
}
