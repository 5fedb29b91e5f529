/** Setting how a deliverable is measured. Measurements made by earlier plans stay; the newest plan's are those that hold. */
import type { z } from 'zod';
import type { setPlanResultSchema, setPlanSchema } from '../../domain/api/deliverables.ts';
import { misfitOf } from '../../domain/measuring-plan.ts';
import { planWords } from '../../domain/plan-words.ts';
import { isOpen } from '../../domain/submission-states.ts';
import type { DeliverableState } from '../../domain/vocabulary.ts';
import { engineVersion } from '../../engine/figures.ts';
import type { MeasuringPlan } from '../../engine/plan.ts';
import type { FrameRateName } from '../../engine/timecode.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { inTransaction, type Db } from '../db/connection.ts';
import { unjudge } from '../db/deliverable-details-repository.ts';
import { countMeasured, ensurePlan, findKnownFile, setCurrentPlan } from '../db/plans-repository.ts';
import {
  listSubmissionsOfDeliverable,
  lockDeliverable,
  type LockedDeliverable,
} from '../db/submission-making-repository.ts';
import { publishEvent } from '../events.ts';
import { enqueueMeasuring } from '../queue/measuring-queue.ts';
import { redis } from '../redis.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope } from '../scope.ts';
import { readDeliverableRow } from './deliverables.ts';
import { judgeDeliverables } from './judging.ts';
import { isWholeFile, planHash } from './plan-identity.ts';

type SetPlan = z.infer<typeof setPlanSchema>;
type SetPlanResult = z.infer<typeof setPlanResultSchema>;

const onItsWay: Record<Exclude<DeliverableState, 'measured' | 'unreadable'>, string> = {
  uploading:
    'It is still being uploaded. Say how to measure it once it has been measured for the first time.',
  waiting: 'It waits to be measured. Change how once that has ended.',
  measuring: 'It is being measured. Change how once that has ended.',
};
/** No plan makes a file readable that is not there, or not the one that was sent. */
const beyondHelp = new Set(['missing', 'hash-mismatch']);

/**
 * Has a deliverable measured by this plan. Where this engine has measured it so before, those figures stand at once;
 * else it waits for a new job. Refused while it is on its way, and while a submission of it is open.
 */
export async function setMeasuringPlan(
  scope: MemberScope,
  id: string,
  { plan, frameRate }: SetPlan,
): Promise<Answer<SetPlanResult>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const answer = await inTransaction<SetPlanResult['how']>(async (trx) => {
    const deliverable = await lockDeliverable(trx, scope, id);
    if (!deliverable) return refuse('not_found', 'There is no such deliverable.');
    const fault = (await whyNotNow(trx, scope, deliverable)) ?? (await whyNotSo(trx, scope, id, plan));
    return fault ?? done(await putPlan(trx, scope, deliverable, plan, frameRate));
  });
  if (!answer.ok) return answer;
  const how = answer.value;
  if (how === 'measuring') await enqueueMeasuring(id);
  if (how !== 'same')
    await publishEvent(redis(), [scope.organisationId], {
      kind: 'deliverable',
      id,
      state: how === 'measuring' ? 'waiting' : 'measured',
      progress: null,
    });
  const row = await readDeliverableRow(scope, id);
  return row.ok ? done({ deliverable: row.value, how }) : row;
}

async function whyNotNow(
  trx: Db,
  scope: MemberScope,
  { id, state, reason, reasonCode }: LockedDeliverable,
): Promise<Answer<never> | null> {
  if (state !== 'measured' && state !== 'unreadable') return refuse('conflict', onItsWay[state]);
  if (reasonCode !== null && beyondHelp.has(reasonCode)) return refuse('conflict', reason ?? '');
  const open = (await listSubmissionsOfDeliverable(trx, scope, id)).find((one) => isOpen(one.state));
  if (!open) return null;
  return refuse(
    'conflict',
    open.state === 'awaiting_review'
      ? `It awaits review at ${open.channelName} by the figures that it has. Withdraw it first, then measure it another way.`
      : `It is approved for ${open.channelName} by the figures that it has, so it is not measured another way.`,
  );
}

/** What keeps the plan from fitting the file, as far as a measurement has told of it. */
async function whyNotSo(
  trx: Db,
  scope: MemberScope,
  id: string,
  plan: MeasuringPlan,
): Promise<Answer<never> | null> {
  const known = await findKnownFile(trx, scope, id);
  if (!known) return null;
  const { format } = known;
  const streams = format.streams?.length ?? 1;
  if (plan.stream >= streams)
    return refuse(
      'bad_input',
      streams === 1
        ? 'The file has one audio stream, so there is no other to choose.'
        : `The file has ${streams} audio streams; number ${plan.stream + 1} is not among them.`,
    );
  const channels = format.streams?.[plan.stream]?.channels ?? format.channels;
  const misfit = misfitOf(plan, { channels, durationSeconds: format.durationSeconds });
  return misfit === null ? null : refuse('bad_input', misfit);
}

async function putPlan(
  trx: Db,
  scope: MemberScope,
  deliverable: LockedDeliverable,
  plan: MeasuringPlan,
  frameRate: FrameRateName | null,
): Promise<SetPlanResult['how']> {
  const { id, organisationId } = deliverable;
  const parametersHash = planHash(plan);
  const planId = isWholeFile(plan)
    ? null
    : await ensurePlan(trx, scope, { organisationId, deliverableId: id, plan, parametersHash });
  const measured = await countMeasured(trx, scope, { deliverableId: id, engineVersion, parametersHash });
  const again = measured < (plan.presentations?.length ?? 1);
  if (!again && planId === deliverable.planId && deliverable.state === 'measured') {
    await setCurrentPlan(trx, scope, id, { planId, frameRate, again });
    return 'same';
  }
  await setCurrentPlan(trx, scope, id, { planId, frameRate, again });
  await unjudge(trx, scope, id);
  if (!again) await judgeDeliverables(trx, scope, { deliverableIds: [id] });
  await recordEvent(trx, scope, {
    organisationId,
    action: 'deliverable.plan_changed',
    subjectKind: 'deliverable',
    subjectId: id,
    detail: {
      fileName: deliverable.fileName,
      programmeTitle: deliverable.programmeTitle,
      episodeLabel: deliverable.episodeLabel,
      plan: planWords(plan),
    },
  });
  return again ? 'measuring' : 'known';
}
