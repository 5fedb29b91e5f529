/** Words of every mail, plain and HTML from one outline, so that both say the same. Everything given is escaped. */
import { outcomeNames, roleNames } from '../../domain/vocabulary.ts';
import type { MailKind, MailModels, MailWords } from './models.ts';

/** A mail before it is written: paragraphs, a small table of facts, one link. */
interface Outline {
  subject: string;
  greeting?: string;
  paragraphs: string[];
  /** A person's own words, set apart. */
  quote?: string;
  facts?: { head: string; rows: string[][] };
  link: { text: string; url: string };
  after?: string[];
  caution?: boolean;
}

const caution =
  "This is a measurement against the rules entered here. The receiving party's own delivery spec and national law prevail.";

const escapeHtml = (text: string) =>
  text.replace(
    /[&<>"']/g,
    (sign) => ({ '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&#39;' })[sign] ?? sign,
  );

/** One line: a header can carry no line break, whatever a file is called. */
const oneLine = (text: string) => text.replace(/[\u0000-\u001f\u007f\u2028\u2029]+/g, ' ').trim();

/** '4 December 2026 at 18:00 GMT', in the zone given. */
const moment = (at: Date, timeZone: string) =>
  new Intl.DateTimeFormat('en-GB', {
    timeZone,
    day: 'numeric',
    month: 'long',
    year: 'numeric',
    hour: '2-digit',
    minute: '2-digit',
    timeZoneName: 'short',
  }).format(at);

/** 'The Tallow Road 1.04', or the file's name where nothing else is known. */
function titleOf(facts: {
  programmeTitle: string | null;
  episodeLabel: string | null;
  fileName: string;
}): string {
  return facts.programmeTitle
    ? [facts.programmeTitle, facts.episodeLabel].filter(Boolean).join(' ')
    : facts.fileName;
}

type Outlines = { [K in MailKind]: (model: MailModels[K], origin: string) => Outline };

const outlines: Outlines = {
  invitation: (m, origin) => ({
    subject: `${m.inviterName} invites you to ${m.organisationName} on Plimsoll`,
    paragraphs: [
      `${m.inviterName} has invited you to work for ${m.organisationName} on Plimsoll as ${m.roles.map((role) => roleNames[role].replace(/^(?!QC)./, (c) => c.toLowerCase())).join(' and ')}.`,
      'Plimsoll measures finished mixes, holds them against the delivery spec of each channel, and carries them through review.',
    ],
    link: { text: 'Accept the invitation', url: `${origin}/invitation/${m.token}` },
    after: [
      `The link works once, until ${moment(m.expiresAt, 'Etc/UTC')}.`,
      'If you did not expect this, leave it: nothing happens without the link.',
    ],
  }),
  password_reset: (m, origin) => ({
    subject: 'Choose a new password for Plimsoll',
    greeting: m.name,
    paragraphs: ['Somebody, most likely you, asked for a new password for your sign-in.'],
    link: { text: 'Choose a new password', url: `${origin}/reset-password/${m.token}` },
    after: [
      `The link works once, until ${moment(m.expiresAt, 'Etc/UTC')}. A new password ends every session of yours.`,
      'If it was not you, leave this mail: your password stays as it is.',
    ],
  }),
  submission_received: (m, origin) => ({
    subject: `For review: ${titleOf(m)} for ${m.channelName} (${outcomeNames[m.outcome]})`,
    paragraphs: [`${m.supplierName} has submitted ${titleOf(m)} for ${m.channelName}.`],
    facts: {
      head: 'The delivery',
      rows: [
        ['File', m.fileName],
        ['Verdict', m.nearestText ? `${outcomeNames[m.outcome]}: ${m.nearestText}` : outcomeNames[m.outcome]],
        ...(m.airAt ? [['Airs', moment(m.airAt, m.timeZone)]] : []),
      ],
    },
    link: { text: 'Open it in the review queue', url: `${origin}/review/${m.submissionId}` },
    caution: true,
  }),
  submission_approved: (m, origin) => ({
    subject: `Approved: ${titleOf(m)} for ${m.channelName}`,
    paragraphs: [
      `${m.distributorName} has approved ${titleOf(m)} (${m.fileName}) for ${m.channelName}${m.waivers.length ? ', with a waiver' : ''}.`,
    ],
    facts: m.waivers.length
      ? { head: 'Waived', rows: m.waivers.map((w) => [w.ruleName, w.reason]) }
      : undefined,
    link: { text: 'See the report', url: `${origin}/deliverables/${m.deliverableId}` },
    caution: true,
  }),
  submission_rejected: (m, origin) => ({
    subject: `Rejected: ${titleOf(m)} for ${m.channelName}`,
    paragraphs: [
      `${m.distributorName} has rejected ${titleOf(m)} (${m.fileName}) for ${m.channelName}. The reason given:`,
    ],
    quote: m.reason,
    facts: m.failingRules.length
      ? {
          head: 'Rules that it does not meet',
          rows: m.failingRules.map((r) => [
            r.name,
            `measured ${r.judgedText}`,
            `permitted ${r.permittedText}`,
            r.marginText,
          ]),
        }
      : undefined,
    link: { text: 'See the report and where it happens', url: `${origin}/deliverables/${m.deliverableId}` },
    caution: true,
  }),
};

function asText(o: Outline): string {
  const facts = o.facts
    ? `${o.facts.head}:\n${o.facts.rows.map((row) => `  ${row[0]}: ${row.slice(1).join('; ')}`).join('\n')}`
    : null;
  const parts = [
    o.greeting ? `${o.greeting},` : null,
    ...o.paragraphs,
    o.quote
      ? o.quote
          .split('\n')
          .map((line) => `> ${line}`)
          .join('\n')
      : null,
    facts,
    `${o.link.text}:\n${o.link.url}`,
    ...(o.after ?? []),
    o.caution ? caution : null,
    '-- \nPlimsoll',
  ];
  return `${parts.filter((part) => part !== null).join('\n\n')}\n`;
}

// Mail programs know no CSS variables: these are the tokens of Paper (src/styles/global.css) written out.
const colour = {
  ground: '#f3efe6',
  sheet: '#fbf8f1',
  ink: '#17233c',
  muted: '#56617a',
  hairline: '#d9d1c0',
  teal: '#1b6a66',
};

function asHtml(o: Outline): string {
  const p = (text: string, more = '') => `<p style="margin:0 0 16px;${more}">${escapeHtml(text)}</p>`;
  const small = `font-size:13px;color:${colour.muted};`;
  const cell = `padding:6px 16px 6px 0;border-top:1px solid ${colour.hairline};text-align:left;vertical-align:top;font-size:14px;`;
  const facts = o.facts
    ? `<table role="presentation" style="border-collapse:collapse;margin:0 0 16px;width:100%"><caption style="${small}text-align:left;padding:0 0 6px">${escapeHtml(o.facts.head)}</caption>${o.facts.rows
        .map(
          (row) => `<tr>${row.map((text) => `<td style="${cell}">${escapeHtml(text)}</td>`).join('')}</tr>`,
        )
        .join('')}</table>`
    : '';
  const quote = o.quote
    ? `<blockquote style="margin:0 0 16px;padding:0 0 0 12px;border-left:2px solid ${colour.ink};white-space:pre-wrap">${escapeHtml(o.quote)}</blockquote>`
    : '';
  const url = escapeHtml(o.link.url);
  return `<!doctype html><html lang="en"><head><meta charset="utf-8"><title>${escapeHtml(o.subject)}</title></head>
<body style="margin:0;padding:24px;background:${colour.ground};color:${colour.ink};font:16px/24px 'Schibsted Grotesk',system-ui,sans-serif">
<div style="max-width:560px;margin:0 auto;padding:24px;background:${colour.sheet};border:1px solid ${colour.hairline}">
${o.greeting ? p(`${o.greeting},`) : ''}${o.paragraphs.map((text) => p(text)).join('')}${quote}${facts}
<p style="margin:0 0 16px"><a href="${url}" style="display:inline-block;padding:8px 16px;border:1px solid ${colour.teal};color:${colour.teal};text-decoration:none;font-weight:600">${escapeHtml(o.link.text)}</a></p>
<p style="margin:0 0 16px;${small}word-break:break-all">${url}</p>
${(o.after ?? []).map((text) => p(text, small)).join('')}${o.caution ? p(caution, small) : ''}<p style="margin:0;${small}">Plimsoll</p>
</div></body></html>`;
}

/** Subject, plain text and HTML of a mail; links start at `origin`, which has no slash at its end. */
export function writeMail<K extends MailKind>(kind: K, model: MailModels[K], origin: string): MailWords {
  const outline = outlines[kind](model, origin);
  return { subject: oneLine(outline.subject).slice(0, 200), text: asText(outline), html: asHtml(outline) };
}
