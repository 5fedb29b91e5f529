import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import {
  decisionsResultSchema,
  submissionReportSchema,
  type SubmissionRow,
} from '../../../src/domain/api/submissions.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { decideSubmissions, takeBackDecision } from '../../../src/server/services/decisions.ts';
import { getSubmissionReport, withdrawSubmission } from '../../../src/server/services/submissions.ts';
import { makeChain, makeMember, openWorld, type World } from '../../factories/world.ts';
import { codeOf, firstOf, refusalOf, valueOf } from '../answers.ts';
import { actionsOn, failing, mailsAbout, makeSubmitted, submit, type Chain } from './delivery.ts';

let world: World;
let chain: Chain;
let second: MemberScope;
beforeAll(async () => {
  world = await openWorld({ UNDO_SECONDS: '60' });
});
beforeEach(async () => {
  chain = await makeChain(world.db);
  second = await makeMember(world.db, chain.distributor, ['qc_operator']);
});
afterAll(() => world.close());

type Asked = Parameters<typeof decideSubmissions>[1][number];
const decide = async (scope: MemberScope, decision: Asked) =>
  firstOf(await decideSubmissions(scope, [decision]));
const approve = ({ id, version }: SubmissionRow): Asked => ({ id, version, decision: 'approve' });
const reject = ({ id, version }: SubmissionRow, failingRuleIds: string[] = []): Asked => ({
  id,
  version,
  decision: 'reject',
  reason: 'Please bring it down by 4 LU.',
  failingRuleIds,
});
const waive = ({ id, version }: SubmissionRow, ...ruleIds: string[]): Asked => ({
  id,
  version,
  decision: 'approve_with_waiver',
  waivers: ruleIds.map((ruleId) => ({ ruleId, reason: 'Live event, agreed by telephone.' })),
});
const decisionMails = async (id: string) =>
  (await mailsAbout(world.db, id)).filter((mail) => mail.kind !== 'submission_received');

describe('deciding', () => {
  it('approves what passes: state, decider, audit for both sides, a mail that waits for the undo time', async () => {
    const row = await makeSubmitted(world.db, chain);
    const decided = valueOf(await decide(chain.operator, approve(row)));
    expect(decided).toMatchObject({
      state: 'approved',
      version: 2,
      decidedBy: { id: chain.operator.userId, name: chain.operator.userName },
    });
    const decidedAt = new Date(decided.decidedAt ?? '');
    expect(new Date(decided.takeBackUntil ?? '').getTime() - decidedAt.getTime()).toBe(60_000);
    const mails = await decisionMails(row.id);
    expect(mails).toMatchObject([
      { kind: 'submission_approved', to_address: chain.mixer.email, state: 'queued' },
    ]);
    expect(mails[0].send_after.getTime() - decidedAt.getTime()).toBe(60_000);
    const audit = await world
      .db('audit_events')
      .where({ subject_id: row.id, action: 'submission.approved' })
      .first();
    expect(audit).toMatchObject({
      organisation_id: chain.distributor.id,
      counterpart_id: chain.supplier.id,
      actor_id: chain.operator.userId,
    });
    expect(audit.detail).toMatchObject({ channelName: chain.channel.name });
  });

  it('rejects with a reason and the rules that it names, and mails both', async () => {
    const row = await makeSubmitted(world.db, chain, { figures: failing });
    const decided = valueOf(await decide(chain.operator, reject(row, ['integrated'])));
    expect(decided).toMatchObject({
      state: 'rejected',
      decisionReason: 'Please bring it down by 4 LU.',
      failingRuleIds: ['integrated'],
    });
    const [mail] = await decisionMails(row.id);
    expect(mail).toMatchObject({ kind: 'submission_rejected', to_address: chain.mixer.email });
    for (const words of ['Please bring it down by 4 LU.', 'Integrated loudness', 'Maximum true peak'])
      expect(mail.text_body).toContain(words);
  });

  it('approves what fails with every failing rule waived, and keeps who waived what', async () => {
    const row = await makeSubmitted(world.db, chain, { figures: failing });
    const decided = valueOf(await decide(chain.operator, waive(row, 'integrated', 'true-peak')));
    expect(decided.state).toBe('approved_with_waiver');
    const report = submissionReportSchema.parse(valueOf(await getSubmissionReport(chain.mixer, row.id)));
    expect(report.waivers).toMatchObject([
      {
        ruleId: 'integrated',
        reason: 'Live event, agreed by telephone.',
        waivedBy: { id: chain.operator.userId },
      },
      { ruleId: 'true-peak' },
    ]);
    expect((await decisionMails(row.id))[0].text_body).toContain('Maximum true peak');
  });

  it('does not approve what fails without a waiver, and nothing is written', async () => {
    const row = await makeSubmitted(world.db, chain, { figures: failing });
    expect(refusalOf(await decide(chain.operator, approve(row)))).toMatchObject({
      code: 'conflict',
      message:
        'It fails Integrated loudness and Maximum true peak, so it is not approved as it is. Waive what fails with a reason, or reject it.',
    });
    expect(codeOf(await decide(chain.operator, waive(row, 'integrated')))).toBe('conflict');
    expect(codeOf(await decide(chain.operator, waive(row, 'integrated', 'range', 'true-peak')))).toBe(
      'bad_input',
    );
    expect(codeOf(await decide(chain.operator, reject(row, ['colour'])))).toBe('bad_input');
    expect(await world.db('submissions').where('id', row.id).first()).toMatchObject({
      state: 'awaiting_review',
      version: 1,
    });
    expect(await actionsOn(world.db, row.id)).toEqual(['submission.submitted']);
    expect(await decisionMails(row.id)).toEqual([]);
  });

  it('answers item by item in the order asked', async () => {
    const [clean, loud] = [
      await makeSubmitted(world.db, chain),
      await makeSubmitted(world.db, chain, { figures: failing }),
    ];
    const foreign = await makeSubmitted(world.db, await makeChain(world.db));
    const { items } = decisionsResultSchema.parse(
      valueOf(
        await decideSubmissions(chain.operator, [
          approve(loud),
          approve(foreign),
          approve(clean),
          approve(clean),
        ]),
      ),
    );
    expect(items.map((item) => item.id)).toEqual([loud.id, foreign.id, clean.id, clean.id]);
    expect(items.map((item) => (item.ok ? item.value.state : item.error.code))).toEqual([
      'conflict',
      'not_found',
      'approved',
      'conflict',
    ]);
  });

  it('mails the mix engineers of the supplier when whoever submitted it has left', async () => {
    const colleague = await makeMember(world.db, chain.supplier, ['mix_engineer']);
    const row = await makeSubmitted(world.db, chain);
    await world
      .db('memberships')
      .where('user_id', chain.mixer.userId)
      .update({ removed_at: world.db.fn.now() });
    valueOf(await decide(chain.operator, approve(row)));
    expect((await decisionMails(row.id)).map((mail) => mail.to_address)).toEqual([colleague.email]);
  });
});

describe('who decides', () => {
  it('is nobody who uploaded it, in whichever organisation they work now', async () => {
    const row = await makeSubmitted(world.db, chain);
    const both = await makeMember(world.db, chain.distributor, ['qc_operator'], {
      userId: chain.mixer.userId,
    });
    expect(refusalOf(await decide(both, approve(row)))).toMatchObject({
      code: 'forbidden',
      message: expect.stringMatching(/uploaded this file yourself/),
    });
    expect(valueOf(await getSubmissionReport(both, row.id)).ownUpload).toBe(true);
    expect(valueOf(await getSubmissionReport(chain.operator, row.id)).ownUpload).toBe(false);
    expect(valueOf(await decide(chain.operator, approve(row))).state).toBe('approved');
  });

  it('is nobody but QC operators of its distributor', async () => {
    const row = await makeSubmitted(world.db, chain);
    const stranger = await makeChain(world.db);
    expect(codeOf(await decideSubmissions(chain.mixer, [approve(row)]))).toBe('forbidden');
    expect(codeOf(await decideSubmissions(chain.specOwner, [approve(row)]))).toBe('forbidden');
    expect(codeOf(await decide(stranger.operator, approve(row)))).toBe('not_found');
    expect(codeOf(await takeBackDecision(stranger.operator, row.id))).toBe('not_found');
    const distributing = { ...chain.mixer, isDistributor: true, roles: ['qc_operator'] as const };
    expect(codeOf(await decide(distributing, approve(row)))).toBe('forbidden');
  });
});

describe('two people on one submission', () => {
  it('let one decide, and tell the other who did what and when', async () => {
    const row = await makeSubmitted(world.db, chain);
    const answers = await Promise.all([decide(chain.operator, approve(row)), decide(second, reject(row))]);
    const [winner] = answers.filter((answer) => answer.ok);
    const [loser] = answers.filter((answer) => !answer.ok);
    const { state, decidedBy } = valueOf(winner);
    const deed = state === 'approved' ? 'approved' : 'rejected';
    const refusal = refusalOf(loser);
    expect(refusal.code).toBe('conflict');
    expect(refusal.message).toMatch(
      new RegExp(
        `^${decidedBy?.name} \\(${chain.distributor.name}\\) ${deed} it on \\d+ \\w+ \\d{4} at \\d\\d:\\d\\d:\\d\\d (GMT|BST)\\. Your decision was not taken\\.$`,
      ),
    );
    expect(await actionsOn(world.db, row.id)).toEqual(['submission.submitted', `submission.${deed}`]);
    expect(await decisionMails(row.id)).toHaveLength(1);
  });

  it('never both win, however many try at once', async () => {
    const rows = await Promise.all(Array.from({ length: 5 }, () => makeSubmitted(world.db, chain)));
    const all = await Promise.all(
      rows.flatMap((row) =>
        [chain.operator, second, chain.operator].map(async (scope) => ({
          id: row.id,
          code: codeOf(await decide(scope, approve(row))),
        })),
      ),
    );
    for (const row of rows) {
      const codes = all.filter(({ id }) => id === row.id).map(({ code }) => code);
      expect(codes.sort()).toEqual(['conflict', 'conflict', 'ok']);
    }
  });

  it('lets either the withdrawal or the decision happen, never both', async () => {
    const row = await makeSubmitted(world.db, chain);
    const [withdrawn, decided] = await Promise.all([
      withdrawSubmission(chain.mixer, row.id),
      decide(chain.operator, approve(row)),
    ]);
    expect([codeOf(withdrawn), codeOf(decided)].sort()).toEqual(['conflict', 'ok']);
    if (!decided.ok)
      expect(decided.refusal.message).toMatch(
        new RegExp(`^${chain.mixer.userName} .* withdrew it on .* There is nothing left to decide\\.$`),
      );
  });

  it('does not decide on what the reader has not seen', async () => {
    const row = await makeSubmitted(world.db, chain);
    valueOf(await decide(chain.operator, approve(row)));
    valueOf(await takeBackDecision(chain.operator, row.id));
    expect(refusalOf(await decide(second, reject(row))).message).toMatch(
      /took the decision back on .* It awaits a decision again/,
    );
    expect(valueOf(await decide(second, reject({ ...row, version: 3 }))).state).toBe('rejected');
  });
});

describe('taking a decision back', () => {
  it('puts it back to awaiting review, cancels the mail and removes the waivers', async () => {
    const row = await makeSubmitted(world.db, chain, { figures: failing });
    valueOf(await decide(chain.operator, waive(row, 'integrated', 'true-peak')));
    const back = valueOf(await takeBackDecision(second, row.id));
    expect(back).toMatchObject({
      state: 'awaiting_review',
      version: 3,
      decidedBy: null,
      decidedAt: null,
      takeBackUntil: null,
    });
    expect((await decisionMails(row.id)).map((mail) => mail.state)).toEqual(['cancelled']);
    expect(valueOf(await getSubmissionReport(chain.operator, row.id)).waivers).toEqual([]);
    expect(await actionsOn(world.db, row.id)).toEqual([
      'submission.submitted',
      'submission.approved_with_waiver',
      'submission.taken_back',
    ]);
    expect(valueOf(await decide(chain.operator, reject(back))).state).toBe('rejected');
    expect((await decisionMails(row.id)).map((mail) => [mail.kind, mail.state])).toEqual([
      ['submission_approved', 'cancelled'],
      ['submission_rejected', 'queued'],
    ]);
  });

  it('is refused after the undo time', async () => {
    const row = await makeSubmitted(world.db, chain);
    valueOf(await decide(chain.operator, approve(row)));
    await world
      .db('submissions')
      .where('id', row.id)
      .update({ decided_at: world.db.raw("now() - interval '61 seconds'") });
    expect(refusalOf(await takeBackDecision(chain.operator, row.id))).toMatchObject({
      code: 'conflict',
      message: expect.stringContaining('60 s'),
    });
    expect(valueOf(await getSubmissionReport(chain.operator, row.id)).takeBackUntil).toBeNull();
    expect((await decisionMails(row.id)).map((mail) => mail.state)).toEqual(['queued']);
  });

  it('is refused once the mail has gone, even within the time', async () => {
    const row = await makeSubmitted(world.db, chain);
    valueOf(await decide(chain.operator, approve(row)));
    await world
      .db('mail_outbox')
      .where({ submission_id: row.id, kind: 'submission_approved' })
      .update({ state: 'sent' });
    expect(codeOf(await takeBackDecision(chain.operator, row.id))).toBe('conflict');
    expect((await world.db('submissions').where('id', row.id).first()).state).toBe('approved');
  });

  it('is refused for what was never decided, and for what was delivered anew', async () => {
    const row = await makeSubmitted(world.db, chain);
    expect(codeOf(await takeBackDecision(chain.operator, row.id))).toBe('conflict');
    valueOf(await decide(chain.operator, reject(row)));
    valueOf(await submit(chain, { id: row.deliverableId }));
    expect(refusalOf(await takeBackDecision(chain.operator, row.id)).message).toMatch(/delivered anew/);
  });

  it('is offered to those who decide, and not to the supplier', async () => {
    const row = await makeSubmitted(world.db, chain);
    valueOf(await decide(chain.operator, approve(row)));
    expect(valueOf(await getSubmissionReport(second, row.id)).takeBackUntil).not.toBeNull();
    expect(valueOf(await getSubmissionReport(chain.mixer, row.id)).takeBackUntil).toBeNull();
    expect(codeOf(await takeBackDecision(chain.mixer, row.id))).toBe('forbidden');
  });
});

describe('when Redis is away', () => {
  it('decides all the same, and says nothing of who has it open', async () => {
    const row = await makeSubmitted(world.db, chain);
    const { redis } = await import('../../../src/server/redis.ts');
    const pipeline = vi.spyOn(redis(), 'pipeline').mockImplementation(() => {
      throw new Error('gone');
    });
    const publish = vi.spyOn(redis(), 'publish').mockRejectedValue(new Error('gone'));
    try {
      expect(valueOf(await decide(chain.operator, approve(row)))).toMatchObject({
        state: 'approved',
        openBy: [],
      });
    } finally {
      pipeline.mockRestore();
      publish.mockRestore();
    }
  });
});
