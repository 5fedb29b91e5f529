import type { SpecBody } from '@/domain/spec.ts';

/** The published document that the rules were taken from. */
export function SpecSource({ source }: { source: SpecBody['source'] }) {
  if (!source) return <p className="text-muted">Taken from no published document.</p>;
  return (
    <div className="grid max-w-prose gap-1">
      <p>
        {source.document}
        {source.edition && <span className="text-muted">, {source.edition}</span>}
      </p>
      {source.note && <p className="text-muted">{source.note}</p>}
    </div>
  );
}
