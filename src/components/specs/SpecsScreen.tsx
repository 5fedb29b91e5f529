import { useQuery, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { specListSchema, type SpecRow } from '@/domain/api/specs.ts';
import { permittedText, ruleName } from '@/domain/rule-words.ts';
import { contentKindNames } from '@/domain/vocabulary.ts';
import { NewSpecDialog } from './NewSpecDialog.tsx';

interface Props {
  initial: { items: SpecRow[] };
  mayEdit: boolean;
  ownOrganisationId: string;
  timeZone: string;
}

/** The rules that decide most deliveries, in one line. */
function inOneLine({ current }: SpecRow): string {
  if (!current) return 'not in force yet';
  const { rules, unit } = current.body;
  const told = rules.slice(0, 2).map((rule) => `${ruleName(rule)} ${permittedText(rule, unit)}`);
  const more = rules.length - told.length;
  return told.join('; ') + (more > 0 ? `; ${more} more` : '');
}

const cells =
  'max-md:grid max-md:border-b max-md:border-hairline max-md:py-2 max-md:[&>td]:h-auto max-md:[&>td]:border-0 max-md:[&>td]:px-0';

function Screen({ initial, mayEdit, ownOrganisationId, timeZone }: Props) {
  const client = useQueryClient();
  const { data } = useQuery({
    queryKey: ['specs'],
    queryFn: ({ signal }) => api.get('/api/v1/specs', specListSchema, signal),
    initialData: initial,
  });
  const [making, setMaking] = useState(false);
  useLiveEvents((event) => {
    if (event.kind === 'specs' || event.kind === 'again')
      void client.invalidateQueries({ queryKey: ['specs'] });
  });
  const day = new Intl.DateTimeFormat('en-GB', { timeZone, dateStyle: 'medium' });
  return (
    <>
      <div className="flex flex-wrap items-baseline justify-between gap-3 pb-3">
        <h1>Specs</h1>
        {mayEdit && (
          <button type="button" className="btn btn-main" onClick={() => setMaking(true)}>
            New spec
          </button>
        )}
      </div>
      {data.items.length === 0 ? (
        <div className="grid max-w-xl gap-3">
          <p className="text-[16px] font-semibold">No specs yet</p>
          <p>
            {mayEdit
              ? 'A delivery spec says what is permitted of a delivery. Start one from a published document, publish it, and assign it to a channel.'
              : 'You see the specs of the channels that you deliver to, as soon as there is an agreement for one.'}
          </p>
        </div>
      ) : (
        <table className="rows" aria-label="Specs">
          <thead className="max-md:sr-only">
            <tr>
              {['Spec', 'In force', 'Rules', 'Used by'].map((name) => (
                <th key={name} scope="col">
                  {name}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {data.items.map((spec) => (
              <tr key={spec.id} className={cells}>
                <td className="py-1.5!">
                  <a
                    href={`/specs/${spec.id}`}
                    className="font-medium underline decoration-hairline decoration-2 underline-offset-2"
                  >
                    {spec.name}
                  </a>
                  {spec.hasDraft && <span className="text-brass"> draft open</span>}
                  {spec.organisation.id !== ownOrganisationId && (
                    <span className="block text-[13px] text-muted">{spec.organisation.name}</span>
                  )}
                </td>
                <td className="whitespace-nowrap">
                  {spec.current ? (
                    <>
                      version <span className="num">{spec.current.number}</span>
                      <span className="text-muted">
                        {' '}
                        since {spec.current.inForceFrom && day.format(new Date(spec.current.inForceFrom))}
                      </span>
                    </>
                  ) : (
                    <span className="text-muted">none</span>
                  )}
                </td>
                <td className="text-muted">{inOneLine(spec)}</td>
                <td className="py-1.5!">
                  {spec.usedBy.length === 0 && <span className="text-muted">no channel</span>}
                  {spec.usedBy.map((use) => (
                    <span key={`${use.channelId}/${use.contentKind}`} className="block">
                      {use.channelName}
                      <span className="text-muted">, {contentKindNames[use.contentKind].toLowerCase()}</span>
                    </span>
                  ))}
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
      {making && (
        <NewSpecDialog
          own={data.items.filter(({ organisation }) => organisation.id === ownOrganisationId)}
          onClose={() => setMaking(false)}
        />
      )}
    </>
  );
}

/** Every spec that the organisation may read: what is in force, and where. */
export default function SpecsScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}
