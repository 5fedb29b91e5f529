import { useMutation, useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { channelRowSchema, supplierListSchema, type ChannelRow } from '@/domain/api/specs.ts';

interface Props {
  channel: ChannelRow;
  onDone: (channel: ChannelRow, said: string) => void;
}

/** Who may deliver to the channel; for its spec owners, with giving and ending leave. */
export function AgreementsSection({ channel, onDone }: Props) {
  const day = new Intl.DateTimeFormat('en-GB', { timeZone: channel.timeZone, dateStyle: 'medium' });
  const path = `/api/v1/channels/${channel.id}/agreements`;
  const ending = useMutation({
    mutationFn: ({ id }: ChannelRow['agreements'][number]) =>
      api.send('DELETE', `${path}/${id}`, undefined, channelRowSchema),
    onSuccess: (row, { supplier }) =>
      onDone(row, `${supplier.name} can submit to ${channel.name} no more. What they have submitted stays.`),
  });
  return (
    <section aria-labelledby="agreements-head" className="grid content-start gap-3">
      <h2 id="agreements-head" className="text-[17px] font-semibold">
        Suppliers
      </h2>
      {channel.agreements.length === 0 && (
        <p className="text-muted">
          Nobody may deliver yet{channel.editable ? ': give a supplier leave.' : '.'}
        </p>
      )}
      <ul>
        {channel.agreements.map((agreement) => (
          <li
            key={agreement.id}
            className="flex flex-wrap items-center justify-between gap-x-4 gap-y-1 border-b border-hairline py-1.5"
          >
            <span>
              {agreement.supplier.name}
              <span className="text-muted"> since {day.format(new Date(agreement.createdAt))}</span>
            </span>
            {channel.editable && (
              <button
                type="button"
                className="btn btn-quiet"
                aria-label={`End the agreement with ${agreement.supplier.name}`}
                disabled={ending.isPending}
                onClick={() => ending.mutate(agreement)}
              >
                End
              </button>
            )}
          </li>
        ))}
      </ul>
      {ending.error && <Notice tone="refused">{ending.error.message}</Notice>}
      {channel.editable && <GiveLeave channel={channel} path={path} onDone={onDone} />}
    </section>
  );
}

function GiveLeave({ channel, path, onDone }: Props & { path: string }) {
  const [supplierId, setSupplierId] = useState('');
  const suppliers = useQuery({
    queryKey: ['suppliers'],
    queryFn: ({ signal }) => api.get('/api/v1/suppliers', supplierListSchema, signal),
  });
  const open =
    suppliers.data?.items.filter(
      ({ id }) => !channel.agreements.some(({ supplier }) => supplier.id === id),
    ) ?? [];
  const making = useMutation({
    mutationFn: () => api.send('POST', path, { supplierId }, channelRowSchema),
    onSuccess: (row) => {
      const name = open.find(({ id }) => id === supplierId)?.name ?? 'The supplier';
      setSupplierId('');
      onDone(row, `${name} may deliver to ${channel.name} from now on.`);
    },
  });
  return (
    <form
      className="flex flex-wrap items-end gap-2"
      onSubmit={(event) => {
        event.preventDefault();
        if (supplierId !== '') making.mutate();
      }}
    >
      <Field label="Give leave to">
        {(ids) => (
          <select
            className="field"
            value={supplierId}
            onChange={(event) => setSupplierId(event.target.value)}
            {...ids}
          >
            <option value="">{suppliers.data && open.length === 0 ? 'Nobody is left' : 'Choose…'}</option>
            {open.map((supplier) => (
              <option key={supplier.id} value={supplier.id}>
                {supplier.name}
              </option>
            ))}
          </select>
        )}
      </Field>
      <button type="submit" className="btn" disabled={supplierId === '' || making.isPending}>
        Give leave
      </button>
      {suppliers.error && <Notice tone="refused">{suppliers.error.message}</Notice>}
      {making.error && <Notice tone="refused">{making.error.message}</Notice>}
    </form>
  );
}
