import type { SpecChange } from '@/domain/spec-changes.ts';

/** What changed, rule by rule, in words. */
export function ChangesList({ changes }: { changes: SpecChange[] }) {
  if (changes.length === 0) return <p className="text-muted">No rule and no setting differs.</p>;
  return (
    <ul className="grid gap-1">
      {changes.map(({ name, was, is }) => (
        <li key={name} className="border-b border-hairline pb-1">
          <span className="font-medium">{name}</span>:{' '}
          {was === null ? (
            <>
              new: <span className="num">{is}</span>
            </>
          ) : is === null ? (
            <>
              no more <span className="text-muted">(was </span>
              <span className="num text-muted">{was}</span>
              <span className="text-muted">)</span>
            </>
          ) : (
            <>
              <span className="num text-muted">{was}</span> becomes <span className="num">{is}</span>
            </>
          )}
        </li>
      ))}
    </ul>
  );
}
