import { Figure } from '@/components/look/Figure.tsx';
import type { DeliverableReport } from '@/domain/api/deliverables.ts';
import { formatBytes, formatLevel, formatRate, formatTimecode } from '@/domain/figures-text.ts';
import { defaultSilence } from '@/engine/facts/thresholds.ts';
import type { Stretch } from '@/engine/figures.ts';

/** What the sheet reads of a measurement: the bench's has no row. */
type Measured = Pick<
  NonNullable<DeliverableReport['measurement']>,
  'engineVersion' | 'format' | 'figures' | 'findings'
>;
interface Props {
  measurement: Measured;
  fileName: string;
  byteSize?: number;
  sha256: string | null;
  /** Writes a time of the measured stretch. */
  timeOf?: (seconds: number) => string;
  /** Address of this page with the passage at that stretch; left out where there is no passage to show. */
  passageAt?: (stretch: Stretch) => string;
}

const Row = ({ name, children }: { name: string; children: React.ReactNode }) => (
  <>
    <dt className="text-muted">{name}</dt>
    <dd className="text-right">{children}</dd>
  </>
);

type Figures = Measured['figures'];

/** Facts of the signal; where a spec has a say in them its rules tell. */
function SignalSheet({
  signal,
  downmix,
  at,
  timeOf,
  list,
}: {
  signal: NonNullable<Figures['signal']>;
  downmix: Figures['downmix'];
  /** Writes a time of the programme under a figure. */
  at: (seconds: number | null) => React.ReactNode;
  timeOf: (seconds: number) => string;
  list: string;
}) {
  const silence = signal.silence.find(({ levelDbfs }) => levelDbfs === defaultSilence.levelDbfs);
  const { stereo } = signal;
  const offset = Math.max(0, ...signal.dcOffsetPercent.map(Math.abs));
  return (
    <section className="sheet p-4">
      <h2 className="mb-2 text-[13px] font-semibold">The signal</h2>
      <dl className={list}>
        {silence && (
          <Row name={`Silence under ${formatLevel(silence.levelDbfs, 0)} dBFS`}>
            <span className="num">
              {silence.headSeconds.toFixed(2)} s at the head, {silence.tailSeconds.toFixed(2)} s at the tail
            </span>
            <span className="num block">{silence.longestInsideSeconds.toFixed(2)} s inside</span>
            {silence.longestInsideSeconds > 0 && at(silence.longestInsideAtSeconds)}
          </Row>
        )}
        <Row name="Drop-outs">
          <span className="num">{signal.dropOuts.count}</span>
        </Row>
        <Row name="Clipped runs">
          <span className="num">
            {signal.clipping.count}
            {signal.clipping.count > 0 && `, the longest of ${signal.clipping.longestSamples} samples`}
          </span>
        </Row>
        <Row name="DC offset">
          <Figure value={offset} unit="%" decimals={2} />
        </Row>
        {stereo && (
          <>
            <Row name="Balance, left over right">
              <Figure value={stereo.balanceLu} unit="LU" decimals={2} />
            </Row>
            <Row name="Lowest correlation">
              <Figure value={stereo.correlationLowest} decimals={2} />
              {at(stereo.correlationLowestAtSeconds)}
            </Row>
            <Row name="Time out of phase">
              <Figure value={stereo.belowZeroPercent} unit="%" />
            </Row>
          </>
        )}
        {signal.lineUpTone && (
          <Row name="Line-up tone">
            <Figure value={signal.lineUpTone.levelDbfs} unit="dBFS" />
            <span className="num block text-[12px] text-muted">
              {Math.round(signal.lineUpTone.hz)} Hz, {timeOf(signal.lineUpTone.startSeconds)} to{' '}
              {timeOf(signal.lineUpTone.endSeconds)}
            </span>
          </Row>
        )}
        <Row name="Bandwidth">
          <Figure value={signal.bandwidthHz === null ? null : signal.bandwidthHz / 1000} unit="kHz" />
        </Row>
        {downmix && (
          <>
            <Row name="Stereo downmix, integrated">
              <Figure value={downmix.integratedLufs} unit="LUFS" />
            </Row>
            <Row name="Stereo downmix, true peak">
              <Figure value={downmix.truePeakDbtp} unit="dBTP" />
            </Row>
          </>
        )}
      </dl>
    </section>
  );
}

function FindingTime({
  stretch,
  timeOf,
  passageAt,
}: { stretch: Stretch } & Pick<Props, 'passageAt'> & Required<Pick<Props, 'timeOf'>>) {
  const time = timeOf(stretch.atSeconds);
  if (!passageAt) return <span className="num text-muted">{time}</span>;
  return (
    <a
      className="num text-teal underline underline-offset-4"
      href={passageAt(stretch)}
      aria-label={`Show the passage at ${time}`}
    >
      {time}
    </a>
  );
}

/** Every figure and fact that stands, whatever a spec asks. */
export function FactsSheet({
  measurement,
  fileName,
  byteSize,
  sha256,
  timeOf = formatTimecode,
  passageAt,
}: Props) {
  const at = (seconds: number | null) =>
    seconds !== null && <span className="num block text-[12px] text-muted">at {timeOf(seconds)}</span>;
  const { format: f, figures, findings } = measurement;
  const { loudness: l, times } = figures;
  const isWindow = Math.abs(f.durationSeconds - figures.measuredSeconds) > 0.01;
  const list = 'grid grid-cols-[auto_1fr] gap-x-4 gap-y-1 text-[13px]';
  return (
    <div className="grid min-w-0 gap-5">
      <section className="sheet p-4">
        <h2 className="mb-2 text-[13px] font-semibold">Figures</h2>
        <dl className={list}>
          <Row name="Integrated loudness">
            <Figure value={l.integratedLufs} unit="LUFS" />
          </Row>
          {l.dualMonoIntegratedLufs !== undefined && (
            <Row name="  as dual mono">
              <Figure value={l.dualMonoIntegratedLufs} unit="LUFS" />
            </Row>
          )}
          <Row name="Relative gate">
            <Figure value={l.relativeThresholdLufs} unit="LUFS" />
          </Row>
          <Row name="Loudness range">
            {l.rangeLu !== null && figures.measuredSeconds < 60 && (
              <span className="text-[12px] text-muted">short for a range </span>
            )}
            <Figure value={l.rangeLu} unit="LU" />
          </Row>
          <Row name="  from, to">
            <Figure value={l.rangeLowLufs} unit="LUFS" /> to <Figure value={l.rangeHighLufs} unit="LUFS" />
          </Row>
          <Row name="Maximum short-term">
            <Figure value={l.shortTermMaxLufs} unit="LUFS" />
            {at(times.shortTermMaxAtSeconds)}
          </Row>
          <Row name="Maximum momentary">
            <Figure value={l.momentaryMaxLufs} unit="LUFS" />
            {at(times.momentaryMaxAtSeconds)}
          </Row>
          <Row name="Maximum true peak">
            <Figure value={figures.truePeak.maxDbtp} unit="dBTP" />
            {at(times.truePeakMaxAtSeconds)}
          </Row>
          <Row name="Maximum sample peak">
            <Figure value={figures.samplePeak.maxDbfs} unit="dBFS" />
          </Row>
          <Row name="True peak by audio channel">
            <span className="num">
              {figures.truePeak.perChannelDbtp.map((peak, i) => (
                <span key={i}>
                  {i > 0 && ' / '}
                  <Figure value={peak} />
                </span>
              ))}
            </span>
          </Row>
        </dl>
      </section>
      {figures.signal && (
        <SignalSheet signal={figures.signal} downmix={figures.downmix} at={at} timeOf={timeOf} list={list} />
      )}
      <section className="sheet p-4">
        <h2 className="mb-2 text-[13px] font-semibold">The file</h2>
        <dl className={list}>
          <Row name="Name">
            <span className="num break-all">{fileName}</span>
          </Row>
          <Row name="Container, codec">
            {f.container}, {f.codec}
          </Row>
          <Row name="Sample rate, depth">
            {formatRate(f.sampleRateHz)}
            {f.bitDepth !== null && `, ${f.bitDepth} bit`}
            {figures.signal?.effectiveBitDepth != null &&
              f.bitDepth !== null &&
              figures.signal.effectiveBitDepth < f.bitDepth &&
              `, ${figures.signal.effectiveBitDepth} in use`}
          </Row>
          {f.bitRateKbps != null && <Row name="Bit rate">{f.bitRateKbps} kbit/s</Row>}
          <Row name="Layout">
            {f.layout} ({f.channels})
          </Row>
          <Row name="Duration">
            <span className="num">{formatTimecode(f.durationSeconds)}</span>
          </Row>
          {isWindow && (
            <Row name="Measured">
              <span className="num">
                {timeOf(0)} to {timeOf(figures.measuredSeconds)}
              </span>
            </Row>
          )}
          {f.startTimecode && (
            <Row name="Start timecode">
              <span className="num">{f.startTimecode}</span>
            </Row>
          )}
          {f.frameRate && <Row name="Frame rate">{f.frameRate}</Row>}
          {f.trackNames && <Row name="Tracks">{f.trackNames.filter((name) => name !== '').join(', ')}</Row>}
          {f.declaredLoudness && (
            <Row name="Declared in the file">
              <Figure value={f.declaredLoudness.integratedLufs} unit="LUFS" />,{' '}
              <Figure value={f.declaredLoudness.truePeakDbtp} unit="dBTP" />
            </Row>
          )}
          {byteSize !== undefined && <Row name="Size">{formatBytes(byteSize)}</Row>}
          <Row name="Engine">
            <span className="num">{measurement.engineVersion}</span>
          </Row>
          {sha256 && (
            <Row name="SHA-256">
              <span className="num text-[11.5px] break-all">{sha256}</span>
            </Row>
          )}
        </dl>
      </section>
      {findings.length > 0 && (
        <section className="sheet p-4">
          <h2 className="mb-2 text-[13px] font-semibold">Findings</h2>
          <ul className="grid gap-2 text-[13px]">
            {findings.map((finding, i) => (
              <li key={i}>
                {finding.message}
                {finding.atSeconds !== undefined && (
                  <>
                    {' '}
                    <FindingTime
                      stretch={{ atSeconds: finding.atSeconds, lengthSeconds: finding.lengthSeconds ?? 0 }}
                      timeOf={timeOf}
                      passageAt={passageAt}
                    />
                  </>
                )}
              </li>
            ))}
          </ul>
        </section>
      )}
    </div>
  );
}
