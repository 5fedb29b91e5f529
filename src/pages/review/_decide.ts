// A decision as a plain form: what the buttons of the report send where there is no JavaScript.
import { waiverField } from '@/components/review/review-list.ts';
import { decisionSchema, type SubmissionReport } from '@/domain/api/submissions.ts';
import { refuse, type Answer } from '@/server/refusals.ts';
import type { MemberScope } from '@/server/scope.ts';
import { decideSubmissions, takeBackDecision } from '@/server/services/decisions.ts';
import { textFields } from '../_form.ts';

/** Reads the form, decides or takes back; done with `null`, or refused with a sentence for the page. */
export async function decideByForm(
  scope: MemberScope,
  request: Request,
  report: SubmissionReport,
): Promise<Answer<unknown>> {
  const failing = report.verdict.rules
    .filter(({ outcome }) => outcome === 'fail')
    .map(({ ruleId }) => ruleId);
  const fields = await textFields(request, ['act', 'version', 'reason', ...failing.map(waiverField)]);
  if (fields.act === 'take_back') return takeBackDecision(scope, report.id);
  const decision = decisionSchema.safeParse({
    id: report.id,
    // What the form was drawn from, not what stands now: the second of two people is told.
    version: Number(fields.version),
    decision: fields.act,
    reason: fields.reason,
    failingRuleIds: failing,
    waivers: failing.map((ruleId) => ({ ruleId, reason: fields[waiverField(ruleId)] })),
  });
  if (!decision.success)
    return refuse(
      'bad_input',
      decision.error.issues[0]?.message ?? 'This is no decision. Use the buttons below.',
    );
  const answer = await decideSubmissions(scope, [decision.data]);
  if (!answer.ok) return answer;
  const [item] = answer.value.items;
  return item.ok ? { ok: true, value: null } : refuse('conflict', item.error.message);
}
