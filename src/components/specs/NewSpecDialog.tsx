import { useMutation, useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { api, ApiProblem } from '@/components/live/api.ts';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { specDetailSchema, startingSpecListSchema, type SpecRow } from '@/domain/api/specs.ts';
import { ruleName } from '@/domain/rule-words.ts';
import { ruleText } from '@/domain/spec-changes.ts';
import { SpecSource } from './SpecSource.tsx';

/** A name, and what to start from: a published document, a copy of one's own, or a plain first body. */
export function NewSpecDialog({ own, onClose }: { own: SpecRow[]; onClose: () => void }) {
  const [name, setName] = useState('');
  const [from, setFrom] = useState('');
  const starting = useQuery({
    queryKey: ['starting-specs'],
    queryFn: ({ signal }) => api.get('/api/v1/starting-specs', startingSpecListSchema, signal),
  });
  const copied = own.find(({ id }) => id === from)?.current?.body;
  const document = starting.data?.items.find(({ id }) => id === from);
  const body = document?.body ?? copied;
  const making = useMutation({
    mutationFn: () =>
      api.send(
        'POST',
        '/api/v1/specs',
        { name, ...(document && { startingSpecId: document.id }), ...(copied && { body: copied }) },
        specDetailSchema,
      ),
    onSuccess: ({ id }) => location.assign(`/specs/${id}/draft`),
  });
  const fields = making.error instanceof ApiProblem ? making.error.fields : {};
  return (
    <Dialog title="New spec" onClose={onClose}>
      <form
        noValidate
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          making.mutate();
        }}
      >
        <Field label="Name" error={fields.name}>
          {(ids) => (
            <input
              className="field"
              value={name}
              onChange={(event) => setName(event.target.value)}
              {...ids}
            />
          )}
        </Field>
        <Field label="Start from" error={fields.startingSpecId}>
          {(ids) => (
            <select className="field" value={from} onChange={(event) => setFrom(event.target.value)} {...ids}>
              <option value="">A plain first draft</option>
              <optgroup label="Published documents">
                {starting.data?.items.map((item) => (
                  <option key={item.id} value={item.id}>
                    {item.name}
                  </option>
                ))}
              </optgroup>
              <optgroup label="A copy of your own">
                {own
                  .filter(({ current }) => current)
                  .map((spec) => (
                    <option key={spec.id} value={spec.id}>
                      {spec.name}
                    </option>
                  ))}
              </optgroup>
            </select>
          )}
        </Field>
        {body && (
          <div className="grid gap-2 border-l-2 border-hairline pl-3 text-[13px]">
            <SpecSource source={body.source} />
            <ul>
              {body.rules.map((rule) => (
                <li key={rule.id}>
                  {ruleName(rule)}: <span className="num">{ruleText(rule, body.unit)}</span>
                </li>
              ))}
            </ul>
          </div>
        )}
        {starting.error && <Notice tone="refused">{starting.error.message}</Notice>}
        {making.error && <Notice tone="refused">{making.error.message}</Notice>}
        <div className="flex gap-3">
          <button type="submit" className="btn btn-main" disabled={making.isPending}>
            {making.isPending ? 'Making…' : 'Make the draft'}
          </button>
          <button type="button" className="btn btn-quiet" onClick={onClose}>
            Cancel
          </button>
        </div>
      </form>
    </Dialog>
  );
}
