import { Notice } from '@/components/look/Notice.tsx';
import type { DecisionAnswer } from './use-decisions.ts';

interface Props {
  answers: readonly DecisionAnswer[];
  busy: boolean;
  onTakeBack: (ids: string[]) => void;
  onPutAway: () => void;
}

const quiet = 'text-teal underline underline-offset-4';

/** What became of each row that was decided on; refusals first, with what happened instead. */
export function Answers({ answers, busy, onTakeBack, onPutAway }: Props) {
  if (answers.length === 0) return null;
  const refused = answers.filter(({ ok }) => !ok);
  const done = answers.filter(({ ok }) => ok);
  const undoable = done.filter(({ takeBackUntilMs }) => takeBackUntilMs !== null);
  const states = [...new Set(done.map(({ sentence }) => sentence))];
  return (
    <div className="mb-3 grid gap-2">
      {refused.length > 0 && (
        <Notice tone="refused">
          <p>{refused.length === 1 ? 'One was not decided:' : `${refused.length} were not decided:`}</p>
          <ul className="grid gap-1">
            {refused.map((one) => (
              <li key={one.id}>
                <a href={`/review/${one.id}`}>{one.name}</a>: {one.sentence}
              </li>
            ))}
          </ul>
        </Notice>
      )}
      {done.length > 0 && (
        <Notice>
          <div className="flex flex-wrap items-baseline gap-x-4">
            <span>
              {done.length === 1
                ? `${done[0].name}: ${done[0].sentence.toLowerCase()}`
                : states
                    .map(
                      (state) =>
                        `${done.filter((one) => one.sentence === state).length} ${state.toLowerCase()}`,
                    )
                    .join(', ')}
              {undoable.length > 0 && '. The supplier is not told yet.'}
            </span>
            {undoable.length > 0 && (
              <button
                type="button"
                className={quiet}
                disabled={busy}
                onClick={() => onTakeBack(undoable.map(({ id }) => id))}
              >
                {undoable.length === 1 ? 'Take it back' : `Take all ${undoable.length} back`}
              </button>
            )}
          </div>
          {done.length > 1 && (
            <details>
              <summary className={quiet}>Row by row</summary>
              <ul className="mt-1 grid gap-1">
                {done.map((one) => (
                  <li key={one.id} className="flex flex-wrap gap-x-3">
                    <a href={`/review/${one.id}`}>{one.name}</a> {one.sentence.toLowerCase()}
                    {one.takeBackUntilMs !== null && (
                      <button
                        type="button"
                        className={quiet}
                        disabled={busy}
                        onClick={() => onTakeBack([one.id])}
                      >
                        Take back
                      </button>
                    )}
                  </li>
                ))}
              </ul>
            </details>
          )}
        </Notice>
      )}
      <button type="button" className={`${quiet} justify-self-start text-[12.5px]`} onClick={onPutAway}>
        Put away
      </button>
    </div>
  );
}
