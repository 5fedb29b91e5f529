import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { channelRowSchema, type ChannelRow } from '@/domain/api/specs.ts';
import { channelKindNames, contentKindNames, contentKinds } from '@/domain/vocabulary.ts';
import { AgreementsSection } from './AgreementsSection.tsx';
import { AssignDialog } from './AssignDialog.tsx';
import { ChannelDialog } from './ChannelDialog.tsx';

interface Props {
  initial: ChannelRow;
  /** Whether agreements are the viewer's business: the channel is of their own organisation. */
  isOwn: boolean;
}
type Assignment = ChannelRow['assignments'][number];
const heading = 'text-[17px] font-semibold';

function Screen({ initial, isOwn }: Props) {
  const client = useQueryClient();
  const key = ['channels', initial.id];
  const { data: channel } = useQuery({
    queryKey: key,
    queryFn: ({ signal }) => api.get(`/api/v1/channels/${initial.id}`, channelRowSchema, signal),
    initialData: initial,
  });
  const [dialog, setDialog] = useState<'assign' | 'change' | null>(null);
  const [said, setSaid] = useState<string | null>(null);
  useLiveEvents((event) => {
    if (event.kind === 'specs' || event.kind === 'again') void client.invalidateQueries({ queryKey: key });
  });
  const tell = (row: ChannelRow, sentence: string) => {
    setDialog(null);
    client.setQueryData(key, row);
    setSaid(sentence);
  };
  const takingBack = useMutation({
    mutationFn: ({ id }: Assignment) =>
      api.send('DELETE', `/api/v1/channels/${channel.id}/assignments/${id}`, undefined, channelRowSchema),
    onSuccess: (row, assignment) =>
      tell(row, `${assignment.specName} is taken back: nothing changes on that date.`),
    onError: () => setSaid(null),
  });
  const past = channel.assignments.filter(({ standing }) => standing === 'past');
  return (
    <div className="grid gap-6">
      <div className="flex flex-wrap items-start justify-between gap-3">
        <div>
          <p className="text-[13px]">
            <a href="/channels" className="underline decoration-hairline decoration-2 underline-offset-2">
              Channels
            </a>{' '}
            <span className="text-muted">of {channel.organisation.name}</span>
          </p>
          <h1>{channel.name}</h1>
          <p className="text-muted">
            {channelKindNames[channel.kind]}. Times are in {channel.timeZone}.
          </p>
        </div>
        {channel.editable && (
          <div className="flex flex-wrap gap-2">
            <button type="button" className="btn btn-quiet" onClick={() => setDialog('change')}>
              Change
            </button>
            <button type="button" className="btn btn-main" onClick={() => setDialog('assign')}>
              Assign a spec
            </button>
          </div>
        )}
      </div>
      <div aria-live="polite" className="empty:hidden">
        {said && <Notice>{said}</Notice>}
      </div>
      {takingBack.error && <Notice tone="refused">{takingBack.error.message}</Notice>}
      <div className="grid gap-8 lg:grid-cols-[minmax(0,1fr)_22rem]">
        <section aria-labelledby="held-head" className="grid content-start gap-3">
          <h2 id="held-head" className={heading}>
            What it is held to
          </h2>
          {channel.assignments.length === 0 && (
            <p className="text-muted">
              No kind of content is held to a spec yet, so nothing is judged for this channel.
            </p>
          )}
          {contentKinds.map((kind) => {
            const open = channel.assignments.filter(
              (one) => one.contentKind === kind && one.standing !== 'past',
            );
            return (
              open.length > 0 && (
                <div key={kind} className="grid gap-1 border-b border-hairline pb-2">
                  <h3 className="font-medium">{contentKindNames[kind]}</h3>
                  {/* In order of time: what holds now, then what follows. */}
                  {[...open].reverse().map((assignment) => (
                    <Line key={assignment.id} assignment={assignment} timeZone={channel.timeZone}>
                      {channel.editable && assignment.standing === 'planned' && (
                        <button
                          type="button"
                          className="btn btn-quiet"
                          aria-label={`Take back ${assignment.specName} for ${contentKindNames[kind].toLowerCase()}`}
                          disabled={takingBack.isPending}
                          onClick={() => takingBack.mutate(assignment)}
                        >
                          Take back
                        </button>
                      )}
                    </Line>
                  ))}
                </div>
              )
            );
          })}
          {past.length > 0 && (
            <details>
              <summary className="text-muted underline">Before ({past.length})</summary>
              {past.map((assignment) => (
                <Line key={assignment.id} assignment={assignment} timeZone={channel.timeZone}>
                  <span className="text-muted">{contentKindNames[assignment.contentKind]}</span>
                </Line>
              ))}
            </details>
          )}
        </section>
        {isOwn && <AgreementsSection channel={channel} onDone={tell} />}
      </div>
      {dialog === 'assign' && (
        <AssignDialog
          channel={channel}
          onClose={() => setDialog(null)}
          onDone={({ channel: row, rejudged, changed }) =>
            tell(
              row,
              rejudged === 0
                ? 'Assigned. No verdict was judged anew.'
                : `Assigned. ${rejudged} verdicts were judged anew from kept measurements; ${changed} outcomes changed.`,
            )
          }
        />
      )}
      {dialog === 'change' && (
        <ChannelDialog
          channel={channel}
          timeZone={channel.timeZone}
          onClose={() => setDialog(null)}
          onDone={(row) => tell(row, 'The channel is changed.')}
        />
      )}
    </div>
  );
}

function Line({
  assignment,
  timeZone,
  children,
}: {
  assignment: Assignment;
  timeZone: string;
  children: React.ReactNode;
}) {
  const moment = new Intl.DateTimeFormat('en-GB', { timeZone, dateStyle: 'medium', timeStyle: 'short' });
  return (
    <p className="flex flex-wrap items-center gap-x-3 gap-y-1">
      <a
        href={`/specs/${assignment.specId}`}
        className="underline decoration-hairline decoration-2 underline-offset-2"
      >
        {assignment.specName}
      </a>
      <span className="text-muted">
        {assignment.standing === 'now' ? 'since' : 'from'} {moment.format(new Date(assignment.inForceFrom))}
      </span>
      {children}
    </p>
  );
}

/** One channel: what each kind of content is held to and from when, and who may deliver. */
export default function ChannelScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}
