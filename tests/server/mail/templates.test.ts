import { describe, expect, it } from 'vitest';
import { writeMail } from '../../../src/server/mail/templates.ts';

const origin = 'https://plimsoll.example';
const facts = {
  submissionId: '7c0f3f0e-5a4b-4f4e-9a53-0d4b8d7a1111',
  deliverableId: '7c0f3f0e-5a4b-4f4e-9a53-0d4b8d7a2222',
  fileName: 'tallow_104_mix51_v2.wav',
  programmeTitle: 'The Tallow Road',
  episodeLabel: '1.04',
  channelName: 'Harrow One',
};
const rejected = {
  ...facts,
  distributorName: 'Harrow Sound Television',
  reason: 'The scene at the quay is over.\nPlease bring it down.',
  failingRules: [
    {
      name: 'Maximum true peak',
      judgedText: '+0.3 dBTP',
      permittedText: 'at most \u22121.0 dBTP',
      marginText: '1.3 dB over',
    },
  ],
};
const caution = /receiving party's own delivery spec and national law prevail/;

describe('mails', () => {
  it('say why a delivery was rejected, by which rules and by how much, with a link', () => {
    const { subject, text, html } = writeMail('submission_rejected', rejected, origin);
    expect(subject).toBe('Rejected: The Tallow Road 1.04 for Harrow One');
    expect(text).toContain('> The scene at the quay is over.\n> Please bring it down.');
    expect(text).toContain(
      'Maximum true peak: measured +0.3 dBTP; permitted at most \u22121.0 dBTP; 1.3 dB over',
    );
    expect(text).toContain(`${origin}/deliverables/${facts.deliverableId}`);
    expect(html).toContain(`href="${origin}/deliverables/${facts.deliverableId}"`);
    expect(html).toContain('1.3 dB over');
  });

  it('carry the caution wherever they speak of a verdict', () => {
    const received = {
      ...facts,
      supplierName: 'Copper Kettle Post',
      outcome: 'fail',
      nearestText: 'true peak 1.3 dB over',
      airAt: null,
      timeZone: 'Europe/London',
    } as const;
    const approved = { ...facts, distributorName: 'Harrow Sound Television', waivers: [] };
    for (const mail of [
      writeMail('submission_received', received, origin),
      writeMail('submission_approved', approved, origin),
      writeMail('submission_rejected', rejected, origin),
    ]) {
      expect(mail.text).toMatch(caution);
      expect(mail.html.replaceAll('&#39;', "'")).toMatch(caution);
    }
  });

  it('tell the air date in the zone of the channel', () => {
    const airAt = new Date('2026-07-04T18:30:00Z');
    const model = {
      ...facts,
      supplierName: 'Copper Kettle Post',
      outcome: 'pass',
      nearestText: '',
      airAt,
      timeZone: 'Europe/London',
    } as const;
    expect(writeMail('submission_received', model, origin).text).toMatch(
      /Airs: 4 July 2026 at 19:30 (BST|GMT\+1)/,
    );
  });

  it('cannot be broken out of by what people type or call a file', () => {
    const nasty = {
      ...rejected,
      programmeTitle: null,
      fileName: 'a\r\nBcc: x@elsewhere.example <script>.wav',
      reason: '<img src=x onerror="alert(1)">&',
    };
    const { subject, html } = writeMail('submission_rejected', nasty, origin);
    expect(subject).not.toMatch(/[\r\n]/);
    expect(html).not.toMatch(/<script|<img/);
    expect(html).toContain('&lt;img src=x onerror=&quot;alert(1)&quot;&gt;&amp;');
  });

  it('say what was waived and why', () => {
    const model = {
      ...facts,
      distributorName: 'Harrow Sound Television',
      waivers: [{ ruleName: 'Loudness range', reason: 'A night scene.' }],
    };
    const { text } = writeMail('submission_approved', model, origin);
    expect(text).toContain('with a waiver');
    expect(text).toContain('Loudness range: A night scene.');
  });

  it('carry one-time links and until when they work', () => {
    const token = 'T'.repeat(43);
    const expiresAt = new Date('2026-12-08T09:05:00Z');
    const invitation = writeMail(
      'invitation',
      {
        organisationName: 'Harrow Sound Television',
        inviterName: 'Wren Achterberg',
        roles: ['qc_operator', 'spec_owner'],
        token,
        expiresAt,
      },
      origin,
    );
    expect(invitation.text).toContain(`${origin}/invitation/${token}`);
    expect(invitation.text).toContain('as QC operator and spec owner');
    expect(invitation.text).toContain('8 December 2026');
    const reset = writeMail('password_reset', { name: 'Maren', token, expiresAt }, origin);
    expect(reset.text).toContain(`${origin}/reset-password/${token}`);
  });
});
