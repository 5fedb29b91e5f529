import { useQuery } from '@tanstack/react-query';
import { useEffect, useRef, useState } from 'react';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { api } from '@/components/live/api.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { PassageChart } from '@/components/passage/PassageChart.tsx';
import { draughtsOf } from '@/components/passage/draughts.ts';
import { useAddressState } from '@/components/table/use-address-state.ts';
import { passageSchema, type Passage } from '@/domain/api/deliverables.ts';
import { formatLevel, formatTimecode } from '@/domain/figures-text.ts';
import type { SpecBody } from '@/domain/spec.ts';
import type { Excursion } from '@/domain/verdict.ts';
import { curveName } from './curve-name.ts';

interface Props {
  passageUrl: string;
  audioUrl: string;
  specBody: SpecBody | null;
  integratedLufs: number | null;
  /** The page's search, so that a sent address shows the same stretch. */
  search: string;
  /** Lower chart for a side panel. */
  compact?: boolean;
}

export default function PassagePanel(props: Props) {
  return (
    <ApiProvider>
      <Panel {...props} />
    </ApiProvider>
  );
}

/** Level that playback begins at: a loud mix is turned down to here, a quiet one is left as it is. */
const listeningLufs = -23;
/** Decibels to turn down by; never negative, so playback is never louder than the file. */
const turnedDownDb = (integratedLufs: number | null) =>
  integratedLufs === null ? 6 : Math.max(0, integratedLufs - listeningLufs);
const startVolume = (integratedLufs: number | null) => 10 ** (-turnedDownDb(integratedLufs) / 20);

function shownIn(params: URLSearchParams): [number, number] | null {
  const [from, to] = (params.get('t') ?? '').split('-').map(Number);
  return Number.isFinite(from) && Number.isFinite(to) && to > from ? [from, to] : null;
}

function Panel({ passageUrl, audioUrl, specBody, integratedLufs, search, compact = false }: Props) {
  const [params, change] = useAddressState(search);
  const [current, setCurrent] = useState<number | null>(null);
  const [playing, setPlaying] = useState<number | null>(null);
  const [trouble, setTrouble] = useState(false);
  const audio = useRef<HTMLAudioElement>(null);
  const passage = useQuery({
    queryKey: ['passage', passageUrl],
    queryFn: ({ signal }) => api.get(passageUrl, passageSchema, signal),
    staleTime: Infinity,
  });
  const [draughts] = useState(() => (specBody ? draughtsOf(specBody) : []));
  useEffect(() => {
    if (audio.current) audio.current.volume = startVolume(integratedLufs);
  }, [integratedLufs]);
  const playFrom = (seconds: number) => {
    if (!audio.current) return;
    audio.current.currentTime = seconds;
    setPlaying(seconds);
    // A browser that cannot play says so through the element's error, below.
    void audio.current.play().catch(() => undefined);
  };
  const down = turnedDownDb(integratedLufs);

  return (
    <div className="grid min-w-0 grid-cols-[minmax(0,1fr)] content-start gap-4">
      <section className={compact ? '' : 'sheet px-4 pt-3 pb-2'}>
        {!compact && (
          <div className="mb-1 flex flex-wrap items-baseline justify-between gap-2">
            <h2 className="text-[13px] font-semibold">Passage</h2>
            <span className="text-[12.5px] text-muted">
              short-term filled, momentary line, true peak hanging from above
            </span>
          </div>
        )}
        {passage.data ? (
          <PassageChart
            passage={passage.data}
            draughts={draughts}
            shown={shownIn(params)}
            onShown={
              compact
                ? undefined
                : (range) => change({ t: range ? range.map((s) => s.toFixed(2)).join('-') : null })
            }
            current={current}
            onCurrent={setCurrent}
            onPlayFrom={playFrom}
            playing={playing}
            height={compact ? 240 : 340}
          />
        ) : (
          <div style={{ height: compact ? 240 : 340 }} className="grid place-items-center text-muted">
            {passage.error ? <Notice tone="refused">{passage.error.message}</Notice> : 'Reading the curve…'}
          </div>
        )}
        {/* The original as delivered: there is no text of it to show. */}
        {/* eslint-disable-next-line jsx-a11y/media-has-caption */}
        <audio
          ref={audio}
          controls
          preload="none"
          src={audioUrl}
          aria-label="The original"
          className="mt-2 h-9 w-full"
          onTimeUpdate={(event) => setPlaying(event.currentTarget.currentTime)}
          onEnded={() => setPlaying(null)}
          onError={() => setTrouble(true)}
        />
        {trouble && (
          <Notice tone="refused">
            This browser cannot play the file, or storage did not answer. The figures stand.
          </Notice>
        )}
        <p className="my-2 text-[12.5px] text-muted">
          Start with your monitors low: sustained loud listening harms hearing; follow your local
          workplace-noise rules.{' '}
          {down >= 0.05
            ? `Playback begins ${formatLevel(down)} dB below the file's level`
            : "Playback begins at the file's own level"}{' '}
          and is never louder than the file.
        </p>
      </section>
      {passage.data && specBody && (
        <Excursions
          passage={passage.data}
          current={current}
          compact={compact}
          onPlay={(excursion) => (
            setCurrent(excursion.number),
            playFrom(Math.max(0, excursion.startSeconds - 1))
          )}
        />
      )}
    </div>
  );
}

interface ExcursionsProps {
  passage: Passage;
  current: number | null;
  compact: boolean;
  onPlay: (excursion: Excursion) => void;
}

/** Where a limit is passed, by timecode: the flags of the chart as a list. */
function Excursions({ passage, current, compact, onPlay }: ExcursionsProps) {
  const { excursions } = passage;
  if (excursions.length === 0)
    return compact ? null : <p className="text-muted">No moment passes a limit of this spec.</p>;
  return (
    <section className={compact ? '' : 'sheet px-4 py-3'}>
      <h2 className="mb-1 text-[13px] font-semibold">Excursions</h2>
      <div className="max-h-80 overflow-auto">
        <table className="rows text-[13px]" aria-label="Excursions">
          <thead className="sr-only">
            <tr>
              {['Number', 'What', 'From', 'For', 'Beyond', 'Play'].map((name) => (
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
                <td className="num">{formatTimecode(one.startSeconds)}</td>
                <td className="n num max-sm:hidden">{formatLevel(one.lengthSeconds)} s</td>
                <td className={`n num font-semibold ${one.breach === 'reject' ? 'text-hull' : 'text-brass'}`}>
                  +{formatLevel(one.beyond)}
                  <span className="unit">{one.unit === 'dBTP' ? 'dB' : 'LU'}</span>
                </td>
                <td className="n">
                  <button
                    type="button"
                    className="text-teal underline underline-offset-4"
                    onClick={() => onPlay(one)}
                    aria-label={`Play from excursion ${one.number}`}
                  >
                    Play
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
