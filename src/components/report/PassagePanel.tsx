import { useQuery } from '@tanstack/react-query';
import { useEffect, useRef, useState } from 'react';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { api } from '@/components/live/api.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { PassageChart } from '@/components/passage/PassageChart.tsx';
import { draughtsOf } from '@/components/passage/draughts.ts';
import { useAddressState } from '@/components/table/use-address-state.ts';
import { passageSchema } from '@/domain/api/deliverables.ts';
import { formatLevel } from '@/domain/figures-text.ts';
import {
  plainClock,
  shortTimeInFile,
  startSeconds,
  timeInFile,
  type FileClock,
} from '@/domain/file-clock.ts';
import type { SpecBody } from '@/domain/spec.ts';
import { Excursions } from './Excursions.tsx';

interface Props {
  passageUrl: string;
  /** `null` where there is nothing to play: a set of mono files. */
  audioUrl: string | null;
  specBody: SpecBody | null;
  integratedLufs: number | null;
  /** By which times of the file are written. */
  clock?: FileClock;
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

function Panel({
  passageUrl,
  audioUrl,
  specBody,
  integratedLufs,
  clock = plainClock,
  search,
  compact = false,
}: Props) {
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
  // The measured stretch may begin inside the file; what plays is the file.
  const begins = passage.data?.windowStartSeconds ?? 0;
  const timeOf = (seconds: number) => timeInFile(clock, begins + seconds);
  const playFrom = (seconds: number) => {
    if (!audio.current) return;
    audio.current.currentTime = begins + seconds;
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
            onPlayFrom={audioUrl === null ? undefined : playFrom}
            playing={playing}
            height={compact ? 240 : 340}
            axis={{
              offsetSeconds: startSeconds(clock) + begins,
              label: (seconds) => shortTimeInFile(clock, begins + seconds),
            }}
          />
        ) : (
          <div style={{ height: compact ? 240 : 340 }} className="grid place-items-center text-muted">
            {passage.error ? <Notice tone="refused">{passage.error.message}</Notice> : 'Reading the curve…'}
          </div>
        )}
        {audioUrl === null ? (
          <p className="my-2 text-[12.5px] text-muted">A set of mono files cannot be played as one here.</p>
        ) : (
          <>
            {/* The original as delivered: there is no text of it to show. */}
            {/* eslint-disable-next-line jsx-a11y/media-has-caption */}
            <audio
              ref={audio}
              controls
              preload="none"
              src={audioUrl}
              aria-label="The original"
              className="mt-2 h-9 w-full"
              onTimeUpdate={(event) => setPlaying(event.currentTarget.currentTime - begins)}
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
          </>
        )}
      </section>
      {passage.data && specBody && (
        <Excursions
          passage={passage.data}
          current={current}
          compact={compact}
          timeOf={timeOf}
          onShow={(excursion) => setCurrent(excursion.number)}
          onPlay={
            audioUrl === null
              ? undefined
              : (excursion) => (
                  setCurrent(excursion.number),
                  playFrom(Math.max(0, excursion.startSeconds - 1))
                )
          }
        />
      )}
    </div>
  );
}
