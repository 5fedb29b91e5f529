import { useMemo, useState, type RefObject } from 'react';
import { Notice } from '@/components/look/Notice.tsx';
import { VerdictMark, outcomeTone } from '@/components/look/VerdictMark.tsx';
import { draughtsOf } from '@/components/passage/draughts.ts';
import { PassageChart } from '@/components/passage/PassageChart.tsx';
import { Excursions } from '@/components/report/Excursions.tsx';
import { FactsSheet } from '@/components/report/FactsSheet.tsx';
import { RulesTable } from '@/components/report/RulesTable.tsx';
import { VerdictCaution } from '@/components/report/VerdictCaution.tsx';
import { engineVersion } from '@/engine/figures.ts';
import type { BenchItem } from './bench-queue.ts';
import type { BenchSpec } from './bench-specs.ts';
import { benchPassage, verdictOf } from './bench-verdicts.ts';
import { formatText, quiet } from './columns.tsx';
import type { BenchResult } from './crew.ts';
import { saveFigures } from './figures-file.ts';

interface Props {
  item: BenchItem & { result: BenchResult };
  specs: readonly BenchSpec[];
  /** The one whose rules and limits are shown. */
  spec: BenchSpec;
  onSpec: (id: string) => void;
  heading: RefObject<HTMLHeadingElement | null>;
}

/** One file: its verdict against every spec, the rules of one of them, the passage and every figure. */
export function BenchDetail({ item, specs, spec, onSpec, heading }: Props) {
  const { measured, preview } = item.result;
  const verdict = verdictOf(measured, spec);
  return (
    <section className="mt-8" aria-label={item.file.name}>
      <div className="flex flex-wrap items-baseline gap-x-4 gap-y-1">
        <h2 ref={heading} tabIndex={-1} className="num text-[17px] font-semibold break-all outline-none">
          {item.file.name}
        </h2>
        <span className="text-muted">{formatText(item)}</span>
        <button
          type="button"
          className={`ml-auto text-[12.5px] ${quiet}`}
          onClick={() => saveFigures(item.file.name, item.result)}
        >
          Save the figures as JSON
        </button>
      </div>
      {preview && (
        <div className="mt-2">
          <Notice>{preview}</Notice>
        </div>
      )}
      <h3 className="mt-4 mb-1 text-[13px] font-semibold">Against every spec</h3>
      <ul className="grid border-t border-ink sm:grid-cols-2 sm:gap-x-5 lg:grid-cols-3">
        {specs.map((one) => (
          <SpecLine key={one.id} spec={one} item={item} current={one === spec} onSpec={onSpec} />
        ))}
      </ul>
      <div className="sheet mt-5 px-4 pt-3 pb-1">
        <div className="flex flex-wrap items-baseline gap-x-3">
          <h3 className="text-[13px] font-semibold">{spec.name}</h3>
          <span className="text-[12.5px] text-muted">{[spec.by, spec.use].filter(Boolean).join('; ')}</span>
        </div>
        <RulesTable verdict={verdict} />
        <div className="my-2 grid gap-x-8 gap-y-2 md:grid-cols-2">
          {spec.body.source?.note && <p className="text-[12.5px] text-muted">{spec.body.source.note}</p>}
          <VerdictCaution />
        </div>
      </div>
      <div className="mt-5 grid grid-cols-[minmax(0,1fr)] gap-5 lg:grid-cols-[minmax(0,1fr)_372px]">
        <BenchPassage key={`${item.id}/${spec.id}`} item={item} spec={spec} />
        <div className="grid min-w-0 content-start gap-4">
          <FactsSheet
            measurement={{ engineVersion, ...measured.measurement }}
            fileName={item.file.name}
            byteSize={item.file.size}
            sha256={null}
          />
        </div>
      </div>
    </section>
  );
}

function SpecLine({
  spec,
  item,
  current,
  onSpec,
}: Pick<Props, 'item' | 'spec' | 'onSpec'> & { current: boolean }) {
  const verdict = verdictOf(item.result.measured, spec);
  return (
    <li className="border-b border-hairline">
      <button
        type="button"
        aria-pressed={current}
        className="grid w-full grid-cols-[88px_minmax(0,1fr)] items-start gap-x-2 px-2 py-2 text-left hover:bg-pick aria-pressed:bg-sheet aria-pressed:shadow-[inset_3px_0_0_var(--teal)]"
        onClick={() => onSpec(spec.id)}
      >
        <span className="pt-[3px]">
          <VerdictMark outcome={verdict.outcome} />
        </span>
        <span className="min-w-0">
          <span className={current ? 'font-semibold' : ''}>{spec.name}</span>
          <span className={`block text-[12.5px] ${outcomeTone(verdict.outcome)}`}>{verdict.nearestText}</span>
        </span>
      </button>
    </li>
  );
}

const around = 5;

function BenchPassage({ item, spec }: Pick<Props, 'item' | 'spec'>) {
  const { measured } = item.result;
  const passage = useMemo(() => benchPassage(measured, spec), [measured, spec]);
  const draughts = useMemo(() => draughtsOf(spec.body), [spec]);
  const [shown, setShown] = useState<[number, number] | null>(null);
  const [current, setCurrent] = useState<number | null>(null);
  // A stretch that is asked for is shown by a chart that begins there.
  const [begun, setBegun] = useState(0);
  return (
    <div className="grid min-w-0 grid-cols-[minmax(0,1fr)] content-start gap-4">
      <section className="sheet px-4 pt-3 pb-2">
        <div className="mb-1 flex flex-wrap items-baseline justify-between gap-2">
          <h3 className="text-[13px] font-semibold">Passage</h3>
          <span className="text-[12.5px] text-muted">
            short-term filled, momentary line, true peak hanging from above
          </span>
        </div>
        <PassageChart
          key={begun}
          passage={passage}
          draughts={draughts}
          shown={shown}
          onShown={setShown}
          current={current}
          onCurrent={setCurrent}
        />
      </section>
      <Excursions
        passage={passage}
        current={current}
        compact={false}
        onShow={({ number, startSeconds, lengthSeconds }) => {
          setCurrent(number);
          const length = passage.truePeakDbtp.length * passage.stepSeconds;
          setShown([
            Math.max(0, startSeconds - around),
            Math.min(length, startSeconds + lengthSeconds + around),
          ]);
          setBegun((before) => before + 1);
        }}
      />
    </div>
  );
}
