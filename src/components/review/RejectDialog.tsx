import { useState } from 'react';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Field } from '@/components/look/Field.tsx';
import type { SubmissionRow } from '@/domain/api/submissions.ts';
import { failingNames, failingRules, rowName } from './review-list.ts';
import type { Decision } from './use-decisions.ts';

interface Props {
  rows: SubmissionRow[];
  onClose: () => void;
  onDecide: (decisionOf: (row: SubmissionRow) => Decision) => void;
}

/** Rejects one row or many with one reason; the rules that fail are offered to be named. */
export function RejectDialog({ rows, onClose, onDecide }: Props) {
  const names = failingNames(rows);
  const [left, setLeft] = useState<ReadonlySet<string>>(new Set());
  const [reason, setReason] = useState('');
  const [asked, setAsked] = useState(false);
  const missing = reason.trim() === '';
  const toggle = (name: string) =>
    setLeft((before) => {
      const next = new Set(before);
      if (!next.delete(name)) next.add(name);
      return next;
    });
  return (
    <Dialog
      title={rows.length === 1 ? `Reject ${rowName(rows[0])}` : `Reject ${rows.length} submissions`}
      onClose={onClose}
    >
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          setAsked(true);
          if (missing) return;
          onDecide((row) => ({
            id: row.id,
            version: row.version,
            decision: 'reject',
            reason: reason.trim(),
            failingRuleIds: failingRules(row).flatMap(({ name, ruleId }) => (left.has(name) ? [] : [ruleId])),
          }));
        }}
      >
        {names.length > 0 && (
          <fieldset className="grid gap-1">
            <legend className="mb-1 text-[13px] font-medium">What fails, told with the reason</legend>
            {names.map((name) => (
              <label key={name} className="flex items-baseline gap-2">
                <input type="checkbox" checked={!left.has(name)} onChange={() => toggle(name)} />
                <span>
                  {name}
                  {rows.length === 1 && (
                    <span className="text-muted">
                      , {failingRules(rows[0]).find((rule) => rule.name === name)?.marginText}
                    </span>
                  )}
                </span>
              </label>
            ))}
          </fieldset>
        )}
        <Field
          label="Reason"
          hint={
            rows.length === 1
              ? 'The supplier reads it: what to change, where, by how much.'
              : 'One reason for all of them. Each supplier reads it: what to change, where, by how much.'
          }
          error={asked && missing ? 'Give a reason that the supplier can act on.' : undefined}
        >
          {(ids) => (
            <textarea
              {...ids}
              className="field"
              rows={4}
              maxLength={2000}
              value={reason}
              onChange={(event) => setReason(event.target.value)}
            />
          )}
        </Field>
        <div className="flex justify-end gap-2">
          <button type="button" className="btn btn-quiet" onClick={onClose}>
            Cancel
          </button>
          <button type="submit" className="btn btn-main">
            {rows.length === 1 ? 'Reject' : `Reject ${rows.length}`}
          </button>
        </div>
      </form>
    </Dialog>
  );
}
