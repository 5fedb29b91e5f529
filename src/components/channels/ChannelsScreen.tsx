import { useQuery, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { channelListSchema, type ChannelRow } from '@/domain/api/specs.ts';
import { channelKindNames, contentKindNames } from '@/domain/vocabulary.ts';
import { ChannelDialog } from './ChannelDialog.tsx';

interface Props {
  initial: { items: ChannelRow[] };
  mayEdit: boolean;
  ownOrganisationId: string;
  timeZone: string;
}

const cells =
  'max-md:grid max-md:border-b max-md:border-hairline max-md:py-2 max-md:[&>td]:h-auto max-md:[&>td]:border-0 max-md:[&>td]:px-0';

function Screen({ initial, mayEdit, ownOrganisationId, timeZone }: Props) {
  const client = useQueryClient();
  const { data } = useQuery({
    queryKey: ['channels'],
    queryFn: ({ signal }) => api.get('/api/v1/channels', channelListSchema, signal),
    initialData: initial,
  });
  const [making, setMaking] = useState(false);
  useLiveEvents((event) => {
    if (event.kind === 'specs' || event.kind === 'again')
      void client.invalidateQueries({ queryKey: ['channels'] });
  });
  const isDistributor = data.items.some(({ organisation }) => organisation.id === ownOrganisationId);
  return (
    <>
      <div className="flex flex-wrap items-baseline justify-between gap-3 pb-3">
        <h1>Channels</h1>
        {mayEdit && (
          <button type="button" className="btn btn-main" onClick={() => setMaking(true)}>
            New channel
          </button>
        )}
      </div>
      {data.items.length === 0 ? (
        <div className="grid max-w-xl gap-3">
          <p className="text-[16px] font-semibold">No channels yet</p>
          <p>
            {mayEdit
              ? 'A channel is an outlet that suppliers deliver to. Make one, assign it a spec for each kind of content, and give suppliers leave to deliver.'
              : 'You see a channel as soon as its distributor gives your organisation leave to deliver to it.'}
          </p>
        </div>
      ) : (
        <table className="rows" aria-label="Channels">
          <thead className="max-md:sr-only">
            <tr>
              {['Channel', 'Kind', 'Held to now', 'Planned', ...(isDistributor ? ['Suppliers'] : [])].map(
                (name) => (
                  <th key={name} scope="col">
                    {name}
                  </th>
                ),
              )}
            </tr>
          </thead>
          <tbody>
            {data.items.map((channel) => {
              const now = channel.assignments.filter(({ standing }) => standing === 'now');
              const planned = channel.assignments.filter(({ standing }) => standing === 'planned').length;
              return (
                <tr key={channel.id} className={cells}>
                  <td className="py-1.5!">
                    <a
                      href={`/channels/${channel.id}`}
                      className="font-medium underline decoration-hairline decoration-2 underline-offset-2"
                    >
                      {channel.name}
                    </a>
                    {channel.organisation.id !== ownOrganisationId && (
                      <span className="block text-[13px] text-muted">{channel.organisation.name}</span>
                    )}
                  </td>
                  <td>{channelKindNames[channel.kind]}</td>
                  <td className="py-1.5!">
                    {now.length === 0 && <span className="text-muted">no spec yet</span>}
                    {now.map((assignment) => (
                      <span key={assignment.id} className="block">
                        <span className="text-muted">{contentKindNames[assignment.contentKind]}: </span>
                        <a
                          href={`/specs/${assignment.specId}`}
                          className="underline decoration-hairline decoration-2 underline-offset-2"
                        >
                          {assignment.specName}
                        </a>
                      </span>
                    ))}
                  </td>
                  <td>
                    {planned === 0 ? (
                      <span className="text-muted max-md:hidden">none</span>
                    ) : (
                      <>
                        <span className="num">{planned}</span> planned
                      </>
                    )}
                  </td>
                  {isDistributor && (
                    <td className="text-muted">
                      {channel.agreements.map(({ supplier }) => supplier.name).join(', ') || 'none yet'}
                    </td>
                  )}
                </tr>
              );
            })}
          </tbody>
        </table>
      )}
      {making && (
        <ChannelDialog
          timeZone={timeZone}
          onClose={() => setMaking(false)}
          onDone={({ id }) => location.assign(`/channels/${id}`)}
        />
      )}
    </>
  );
}

/** Every channel that the organisation has or may deliver to, and what it is held to. */
export default function ChannelsScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}
