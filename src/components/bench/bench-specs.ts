/** The specs that the bench holds files against: those of the channels, and those of published documents. */
import type { SpecRow } from '@/domain/api/specs.ts';
import type { SpecBody } from '@/domain/spec.ts';
import { startingSpecs } from '@/domain/starting-specs.ts';
import { contentKindNames } from '@/domain/vocabulary.ts';

export interface BenchSpec {
  id: string;
  name: string;
  /** Whose it is: 'Harrow Sound Television, version 4', or the document and its edition. */
  by: string;
  /** What it is for: 'Harrow One, long form'. */
  use: string;
  published: boolean;
  body: SpecBody;
}

const kindName = (kind: keyof typeof contentKindNames) => contentKindNames[kind].toLowerCase();

export const publishedSpecs: readonly BenchSpec[] = startingSpecs.map(({ id, name, contentKinds, body }) => ({
  id,
  name,
  by: [body.source?.document, body.source?.edition].filter(Boolean).join(', '),
  use: contentKinds.map(kindName).join(', '),
  published: true,
  body,
}));

/** The specs in force among these; those that a channel uses come first. */
export const channelSpecs = (rows: readonly SpecRow[]): BenchSpec[] =>
  rows
    .flatMap(({ id, name, organisation, current, usedBy }): BenchSpec[] =>
      current
        ? [
            {
              id,
              name,
              by: `${organisation.name}, version ${current.number}`,
              use: usedBy
                .map(({ channelName, contentKind }) => `${channelName}, ${kindName(contentKind)}`)
                .join('; '),
              published: false,
              body: current.body,
            },
          ]
        : [],
    )
    .sort((a, b) => Number(a.use === '') - Number(b.use === ''));

/** The chosen specs, by the address; the first one where it names none that is known. */
export function chosenSpecs(specs: readonly BenchSpec[], asked: string | null): BenchSpec[] {
  const ids = new Set((asked ?? '').split(','));
  const chosen = specs.filter(({ id }) => ids.has(id));
  return chosen.length > 0 ? chosen : specs.slice(0, 1);
}
