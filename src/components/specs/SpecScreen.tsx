import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { useAddressState } from '@/components/table/use-address-state.ts';
import { specDetailSchema, type SpecDetail, type SpecVersion } from '@/domain/api/specs.ts';
import { specChanges } from '@/domain/spec-changes.ts';
import { contentKindNames } from '@/domain/vocabulary.ts';
import { ChangesList } from './ChangesList.tsx';
import { publishedText, PublishDialog } from './PublishDialog.tsx';
import { RulesSheet } from './RulesSheet.tsx';
import { SpecSource } from './SpecSource.tsx';

interface Props {
  initial: SpecDetail;
  search: string;
  timeZone: string;
}

const versionName = ({ number }: SpecVersion) => (number === null ? 'Draft' : `Version ${number}`);
const heading = 'text-[17px] font-semibold';

function Screen({ initial, search, timeZone }: Props) {
  const client = useQueryClient();
  const key = ['specs', initial.id];
  const { data: spec } = useQuery({
    queryKey: key,
    queryFn: ({ signal }) => api.get(`/api/v1/specs/${initial.id}`, specDetailSchema, signal),
    initialData: initial,
  });
  const [params, change] = useAddressState(search);
  const [publishing, setPublishing] = useState(false);
  const [said, setSaid] = useState<string | null>(null);
  const discarding = useMutation({
    mutationFn: () => api.send('DELETE', `/api/v1/specs/${spec.id}/draft`, undefined, specDetailSchema),
    onSuccess: (detail) => {
      client.setQueryData(key, detail);
      change({ version: null });
      setSaid('The draft is discarded. Published versions are as they were.');
    },
  });
  useLiveEvents((event) => {
    if (event.kind === 'specs' || event.kind === 'again') void client.invalidateQueries({ queryKey: key });
  });
  const moment = new Intl.DateTimeFormat('en-GB', { timeZone, dateStyle: 'medium', timeStyle: 'short' });
  const text = (at: string | null) => (at ? moment.format(new Date(at)) : '');
  const shown =
    spec.versions.find((version) => String(version.number ?? 'draft') === params.get('version')) ??
    spec.versions.find(({ id }) => id === spec.current?.id) ??
    spec.versions[0];
  const before = shown && spec.versions[spec.versions.indexOf(shown) + 1];
  const standing = (version: SpecVersion) =>
    version.number === null
      ? `saved ${text(version.updatedAt)}`
      : version.id === spec.current?.id
        ? `in force since ${text(version.inForceFrom)}`
        : new Date(version.inForceFrom ?? 0).getTime() > Date.now()
          ? `from ${text(version.inForceFrom)}`
          : `was in force from ${text(version.inForceFrom)}`;
  return (
    <div className="grid gap-6">
      <div className="flex flex-wrap items-start justify-between gap-3">
        <div>
          <p className="text-[13px]">
            <a href="/specs" className="underline decoration-hairline decoration-2 underline-offset-2">
              Specs
            </a>{' '}
            <span className="text-muted">of {spec.organisation.name}</span>
          </p>
          <h1>{spec.name}</h1>
        </div>
        {spec.editable && (
          <div className="flex flex-wrap gap-2">
            <a
              href={`/specs/${spec.id}/draft`}
              className={`btn no-underline ${spec.hasDraft ? '' : 'btn-main'}`}
            >
              {spec.hasDraft ? 'Edit the draft' : 'New version'}
            </a>
            {spec.hasDraft && (
              <>
                <button
                  type="button"
                  className="btn btn-quiet"
                  disabled={discarding.isPending}
                  onClick={() => discarding.mutate()}
                >
                  Discard the draft
                </button>
                <button type="button" className="btn btn-main" onClick={() => setPublishing(true)}>
                  Publish…
                </button>
              </>
            )}
          </div>
        )}
      </div>
      <div aria-live="polite" className="empty:hidden">
        {said && <Notice>{said}</Notice>}
      </div>
      {discarding.error && <Notice tone="refused">{discarding.error.message}</Notice>}
      <div className="grid gap-8 lg:grid-cols-[16rem_minmax(0,1fr)]">
        <nav aria-label="Versions" className="grid content-start gap-1">
          <h2 className={heading}>Versions</h2>
          {spec.versions.map((version) => (
            <a
              key={version.id}
              href={`?version=${version.number ?? 'draft'}`}
              aria-current={version.id === shown?.id ? 'true' : undefined}
              className="border-l-2 border-hairline py-1 pl-3 no-underline aria-[current]:border-teal aria-[current]:bg-pick"
            >
              <span className="font-medium">{versionName(version)}</span>
              <span className="block text-[13px] text-muted">{standing(version)}</span>
            </a>
          ))}
          <p className="text-[13px] text-muted">Times are in {timeZone}.</p>
        </nav>
        {shown && (
          <div className="grid content-start gap-6">
            <section aria-labelledby="rules-head" className="grid gap-2">
              <h2 id="rules-head" className={heading}>
                {versionName(shown)}
              </h2>
              <p className="text-muted">
                {shown.publishedAt
                  ? `Published ${text(shown.publishedAt)}${shown.publishedBy ? ` by ${shown.publishedBy.name}` : ''}.`
                  : `Not published.${shown.createdBy ? ` Last saved by ${shown.createdBy.name}.` : ''}`}
                {shown.changeNote && ` “${shown.changeNote}”`}
              </p>
              <RulesSheet body={shown.body} />
            </section>
            {before && (
              <section aria-labelledby="changes-head" className="grid gap-2">
                <h2 id="changes-head" className={heading}>
                  Changed from version {before.number}
                </h2>
                <ChangesList changes={specChanges(before.body, shown.body)} />
              </section>
            )}
            <section aria-labelledby="source-head" className="grid gap-2">
              <h2 id="source-head" className={heading}>
                Source
              </h2>
              <SpecSource source={shown.body.source} />
            </section>
            <section aria-labelledby="use-head" className="grid gap-2">
              <h2 id="use-head" className={heading}>
                Used now by
              </h2>
              {spec.usedBy.length === 0 && (
                <p className="text-muted">No channel. A spec is assigned on the channel’s page.</p>
              )}
              <ul>
                {spec.usedBy.map((use) => (
                  <li key={`${use.channelId}/${use.contentKind}`}>
                    <a
                      href={`/channels/${use.channelId}`}
                      className="underline decoration-hairline decoration-2 underline-offset-2"
                    >
                      {use.channelName}
                    </a>
                    <span className="text-muted">, {contentKindNames[use.contentKind].toLowerCase()}</span>
                  </li>
                ))}
              </ul>
            </section>
            <p className="max-w-prose text-[13px] text-muted">
              A pass under this spec is a measurement against the rules entered, not a broadcaster’s
              acceptance nor legal advice; national broadcast-loudness law and the receiving party’s own spec
              prevail.
            </p>
          </div>
        )}
      </div>
      {publishing && (
        <PublishDialog
          spec={spec}
          timeZone={timeZone}
          onClose={() => setPublishing(false)}
          onDone={(result) => {
            setPublishing(false);
            client.setQueryData(key, result.spec);
            change({ version: null });
            setSaid(publishedText(result));
          }}
        />
      )}
    </div>
  );
}

/** One spec: its versions, what each says and changes, its source, and where it is used. */
export default function SpecScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}
