import type { Passage } from '@/domain/api/deliverables.ts';
import { formatLevel, formatTimecode } from '@/domain/figures-text.ts';
import type { Excursion } from '@/domain/verdict.ts';
import { curveName } from './curve-name.ts';

interface Props {
  passage: Passage;
  current: number | null;
  compact: boolean;
  /** Writes a time of the measured stretch. */
  timeOf?: (seconds: number) => string;
  /** Left out where nothing can be played: then a row only shows its place. */
  onPlay?: (excursion: Excursion) => void;
  onShow?: (excursion: Excursion) => void;
}

/** Where a limit is passed, by timecode: the flags of the chart as a list. */
export function Excursions({ passage, current, compact, timeOf = formatTimecode, onPlay, onShow }: Props) {
  const { excursions } = passage;
  const [act, word] = onPlay ? [onPlay, 'Play'] : [onShow, 'Show'];
  if (excursions.length === 0)
    return compact ? null : <p className="text-muted">No moment passes a limit of this spec.</p>;
  return (
    <section className={compact ? '' : 'sheet px-4 py-3'}>
      <h2 className="mb-1 text-[13px] font-semibold">Excursions</h2>
      <div className="max-h-80 overflow-auto">
        <table className="rows text-[13px]" aria-label="Excursions">
          <thead className="sr-only">
            <tr>
              {['Number', 'What', 'From', 'For', 'Beyond', word].map((name) => (
                <th key={name} scope="col" className={name === 'For' ? 'max-sm:hidden' : undefined}>
                  {name}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {excursions.map((one) => (
              <tr key={one.number} className={one.number === current ? 'bg-pick' : ''}>
                <td className="w-8">
                  <span
                    className={`num grid h-[19px] w-[19px] place-items-center text-[11px] font-semibold text-sheet ${one.breach === 'reject' ? 'bg-hull' : 'bg-brass'}`}
                  >
                    {one.number}
                  </span>
                </td>
                <td>{curveName(one)}</td>
                <td className="num">{timeOf(one.startSeconds)}</td>
                <td className="n num max-sm:hidden">{formatLevel(one.lengthSeconds)} s</td>
                <td className={`n num font-semibold ${one.breach === 'reject' ? 'text-hull' : 'text-brass'}`}>
                  +{formatLevel(one.beyond)}
                  <span className="unit">{one.unit === 'dBTP' ? 'dB' : 'LU'}</span>
                </td>
                <td className="n">
                  <button
                    type="button"
                    className="text-teal underline underline-offset-4"
                    onClick={() => act?.(one)}
                    aria-label={onPlay ? `Play from excursion ${one.number}` : `Show excursion ${one.number}`}
                  >
                    {word}
                  </button>
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </section>
  );
}
