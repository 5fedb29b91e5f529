import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { publishSpecResultSchema, type PublishSpecResult, type SpecDetail } from '@/domain/api/specs.ts';
import { specChanges } from '@/domain/spec-changes.ts';
import { ChangesList } from './ChangesList.tsx';
import { atOnce, MomentField, readMoment } from './MomentField.tsx';

interface Props {
  spec: SpecDetail;
  timeZone: string;
  onClose: () => void;
  onDone: (result: PublishSpecResult) => void;
}

/** 'Published as version 3. 12 verdicts were judged anew; 2 outcomes changed.' */
export function publishedText({ spec, rejudged, changed }: PublishSpecResult): string {
  const number = Math.max(...spec.versions.map((version) => version.number ?? 0));
  const anew =
    rejudged === 0
      ? 'No verdict was judged anew.'
      : `${rejudged === 1 ? 'One verdict was' : `${rejudged} verdicts were`} judged anew from kept measurements; ${changed === 1 ? 'one outcome' : `${changed} outcomes`} changed.`;
  return `Published as version ${number}. ${anew}`;
}

/** From when the draft is in force; what it changes stands above. */
export function PublishDialog({ spec, timeZone, onClose, onDone }: Props) {
  const [choice, setChoice] = useState(atOnce);
  const [error, setError] = useState<string>();
  const draft = spec.versions.find(({ number }) => number === null);
  const last = spec.versions.find(({ number }) => number !== null);
  const publishing = useMutation({
    mutationFn: (inForceFrom: string | null) =>
      api.send(
        'POST',
        `/api/v1/specs/${spec.id}/publish`,
        { inForceFrom, seenUpdatedAt: draft?.updatedAt },
        publishSpecResultSchema,
      ),
    onSuccess: onDone,
  });
  const submit = () => {
    const read = readMoment(choice, timeZone);
    if ('error' in read) return setError(read.error);
    setError(undefined);
    publishing.mutate(read.moment);
  };
  return (
    <Dialog title={`Publish ${spec.name}`} onClose={onClose} wide>
      <form
        noValidate
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          submit();
        }}
      >
        {draft && last && (
          <div className="grid gap-2">
            <p>
              What changes from version <span className="num">{last.number}</span>:
            </p>
            <ChangesList changes={specChanges(last.body, draft.body)} />
          </div>
        )}
        <MomentField value={choice} onChange={setChoice} zone={timeZone} error={error} />
        <p className="text-muted">
          A published version is never changed. From its moment on, every kept measurement that is held to
          this spec is judged anew; nothing is measured again, and what was submitted keeps the version that
          it was submitted under.
        </p>
        {publishing.error && <Notice tone="refused">{publishing.error.message}</Notice>}
        <div className="flex gap-3">
          <button type="submit" className="btn btn-main" disabled={publishing.isPending}>
            {publishing.isPending ? 'Publishing…' : 'Publish'}
          </button>
          <button type="button" className="btn btn-quiet" onClick={onClose}>
            Cancel
          </button>
        </div>
      </form>
    </Dialog>
  );
}
