import { useMutation, useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { api, ApiProblem } from '@/components/live/api.ts';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { atOnce, MomentField, readMoment } from '@/components/specs/MomentField.tsx';
import {
  createAssignmentResultSchema,
  specListSchema,
  type ChannelRow,
  type CreateAssignmentResult,
} from '@/domain/api/specs.ts';
import { contentKindNames, contentKinds, type ContentKind } from '@/domain/vocabulary.ts';

interface Props {
  channel: ChannelRow;
  onClose: () => void;
  onDone: (result: CreateAssignmentResult) => void;
}

/** Holds a kind of content to a spec, at once or from a date of the channel's clock. */
export function AssignDialog({ channel, onClose, onDone }: Props) {
  const [contentKind, setContentKind] = useState<ContentKind>(
    channel.kind === 'podcast' ? 'podcast_episode' : 'long_form',
  );
  const [specId, setSpecId] = useState('');
  const [choice, setChoice] = useState(atOnce);
  const [faults, setFaults] = useState<{ specId?: string; inForceFrom?: string }>({});
  const specs = useQuery({
    queryKey: ['specs'],
    queryFn: ({ signal }) => api.get('/api/v1/specs', specListSchema, signal),
  });
  const own =
    specs.data?.items.filter(({ organisation }) => organisation.id === channel.organisation.id) ?? [];
  const assigning = useMutation({
    mutationFn: (inForceFrom: string | null) =>
      api.send(
        'POST',
        `/api/v1/channels/${channel.id}/assignments`,
        { contentKind, specId, inForceFrom },
        createAssignmentResultSchema,
      ),
    onSuccess: onDone,
    onError: (error) => setFaults(error instanceof ApiProblem ? error.fields : {}),
  });
  const submit = () => {
    const read = readMoment(choice, channel.timeZone);
    const found = {
      ...(specId === '' && { specId: 'Choose a spec.' }),
      ...('error' in read && { inForceFrom: read.error }),
    };
    setFaults(found);
    if (!('error' in read) && specId !== '') assigning.mutate(read.moment);
  };
  return (
    <Dialog title={`Assign a spec on ${channel.name}`} onClose={onClose}>
      <form
        noValidate
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          submit();
        }}
      >
        <Field label="Content kind">
          {(ids) => (
            <select
              className="field"
              value={contentKind}
              onChange={(event) =>
                setContentKind(contentKinds.find((kind) => kind === event.target.value) ?? 'long_form')
              }
              {...ids}
            >
              {contentKinds.map((kind) => (
                <option key={kind} value={kind}>
                  {contentKindNames[kind]}
                </option>
              ))}
            </select>
          )}
        </Field>
        <Field
          label="Spec"
          hint={specs.data && own.length === 0 ? 'There is none yet: make one on the page Specs.' : undefined}
          error={faults.specId}
        >
          {(ids) => (
            <select
              className="field"
              value={specId}
              onChange={(event) => setSpecId(event.target.value)}
              {...ids}
            >
              <option value="">Choose…</option>
              {own.map((spec) => (
                <option key={spec.id} value={spec.id}>
                  {spec.name}
                  {spec.current ? ` (version ${spec.current.number})` : ' (not in force yet)'}
                </option>
              ))}
            </select>
          )}
        </Field>
        <MomentField value={choice} onChange={setChoice} zone={channel.timeZone} error={faults.inForceFrom} />
        {specs.error && <Notice tone="refused">{specs.error.message}</Notice>}
        {assigning.error && <Notice tone="refused">{assigning.error.message}</Notice>}
        <div className="flex gap-3">
          <button type="submit" className="btn btn-main" disabled={assigning.isPending}>
            {assigning.isPending ? 'Assigning…' : 'Assign'}
          </button>
          <button type="button" className="btn btn-quiet" onClick={onClose}>
            Cancel
          </button>
        </div>
      </form>
    </Dialog>
  );
}
