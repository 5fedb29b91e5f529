import { useState } from 'react';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Field } from '@/components/look/Field.tsx';
import type { SubmissionRow } from '@/domain/api/submissions.ts';
import { failingRules, rowName } from './review-list.ts';
import type { Decision } from './use-decisions.ts';

interface Props {
  row: SubmissionRow;
  onClose: () => void;
  onDecide: (decisionOf: (row: SubmissionRow) => Decision) => void;
}

/** Approves knowingly: every failing rule is named and gets its own reason. */
export function WaiveDialog({ row, onClose, onDecide }: Props) {
  const rules = failingRules(row);
  const [reasons, setReasons] = useState<Record<string, string>>({});
  const [asked, setAsked] = useState(false);
  const reasonOf = (ruleId: string) => (reasons[ruleId] ?? '').trim();
  return (
    <Dialog title={`Approve ${rowName(row)} with a waiver`} onClose={onClose}>
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          setAsked(true);
          if (rules.some(({ ruleId }) => reasonOf(ruleId) === '')) return;
          onDecide(({ id, version }) => ({
            id,
            version,
            decision: 'approve_with_waiver',
            waivers: rules.map(({ ruleId }) => ({ ruleId, reason: reasonOf(ruleId) })),
          }));
        }}
      >
        <p>Your name and each reason stand in the report and in the trail, for both sides.</p>
        {rules.map((rule) => (
          <Field
            key={rule.ruleId}
            label={`${rule.name}: ${rule.judgedText}${rule.judged !== null && rule.unit ? ` ${rule.unit}` : ''}, ${rule.marginText}`}
            hint={`Permitted: ${rule.permittedText}`}
            error={asked && reasonOf(rule.ruleId) === '' ? 'Say why this rule is waived.' : undefined}
          >
            {(ids) => (
              <textarea
                {...ids}
                className="field"
                rows={2}
                maxLength={2000}
                value={reasons[rule.ruleId] ?? ''}
                onChange={(event) => setReasons({ ...reasons, [rule.ruleId]: event.target.value })}
              />
            )}
          </Field>
        ))}
        <div className="flex justify-end gap-2">
          <button type="button" className="btn btn-quiet" onClick={onClose}>
            Cancel
          </button>
          <button type="submit" className="btn btn-main">
            Approve with {rules.length === 1 ? 'this waiver' : `these ${rules.length} waivers`}
          </button>
        </div>
      </form>
    </Dialog>
  );
}
