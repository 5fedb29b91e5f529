import { useFormContext, useWatch, type FieldPath } from 'react-hook-form';
import { Field } from '@/components/look/Field.tsx';
import { LoadLineEditor } from '@/components/look/LoadLineEditor.tsx';
import { formatLimit, roundHalfAway } from '@/domain/figures-text.ts';
import { factNames, findingNames, metricWords } from '@/domain/rule-words.ts';
import type { RangeMetric } from '@/domain/spec.ts';
import { clippedLengths, silenceLevelsDbfs } from '@/engine/facts/thresholds.ts';
import type { FindingCode } from '@/engine/figures.ts';
import { isClipping, isSilence, numberOf, type DraftForm, type RuleForm } from './draft-form.ts';

const finite = (text: string): number | null => {
  const value = numberOf(text);
  return value === null || Number.isNaN(value) ? null : value;
};
const withUnit = (label: string, unit: string) => (unit === '' ? label : `${label} (${unit})`);
const tidy = (value: number) => roundHalfAway(value, 3);

const factHints: Record<string, string> = {
  sampleRateHz: 'In Hz, with commas between: 48000, 44100',
  bitDepth: 'Bits per sample, with commas between: 24, 16',
  layout: 'With commas between: mono, stereo, 5.1, 7.1',
  container: 'With commas between: WAV, RF64, BW64, AIFF, FLAC, MP3, MP4, MOV, MXF',
  codec: 'With commas between: PCM, FLAC, MP3, AAC',
  audioChannels: 'How many, with commas between: 2, 6',
  effectiveBitDepth: 'Bits down to the lowest in use, with commas between: 24, 16',
  frameRate: 'With commas between: 25, 29.97 DF',
  startTimecode: 'As the file tells it: 10:00:00:00',
};

/** How far a dragged limit moves at a time. */
const steps: Partial<Record<RangeMetric, number>> = {
  durationSeconds: 1,
  dropOutCount: 1,
  clippedRunCount: 1,
  bandwidthHz: 100,
  bitRateKbps: 8,
  correlationLowest: 0.05,
  dcOffsetPercent: 0.05,
};

/** What a rule is about, in the trade's words. */
export function subjectName(rule: Pick<RuleForm, 'kind' | 'metric' | 'fact' | 'code'>): string {
  if (rule.kind === 'oneOf') return factNames[rule.fact as keyof typeof factNames];
  if (rule.kind === 'finding') return findingNames[rule.code as FindingCode];
  return metricWords(rule.kind === 'integrated' ? 'integratedLufs' : (rule.metric as RangeMetric)).name;
}

interface Props {
  index: number;
  onRemove: () => void;
}

/** One rule: its limits typed or dragged on its load line, what a breach means, and its measurement tolerance. */
export function RuleFields({ index, onRemove }: Props) {
  const { register, control, setValue, getFieldState, formState } = useFormContext<DraftForm>();
  const rule = useWatch({ control, name: `rules.${index}` });
  const loudnessUnit = useWatch({ control, name: 'unit' });
  const at = (name: keyof RuleForm): FieldPath<DraftForm> => `rules.${index}.${name}`;
  const fault = (name: keyof RuleForm) => getFieldState(at(name), formState).error?.message;
  const put = (name: keyof RuleForm, value: number | null) =>
    setValue(at(name), value === null ? '' : formatLimit(tidy(value)), {
      shouldDirty: true,
      shouldValidate: formState.isSubmitted,
    });
  const name = subjectName(rule);
  const metric = rule.kind === 'integrated' ? 'integratedLufs' : (rule.metric as RangeMetric);
  const { unit, marginUnit } = metricWords(metric, loudnessUnit);
  const isNumeric = rule.kind === 'integrated' || rule.kind === 'limits';

  const input = (field: keyof RuleForm, label: string, hint?: string) => (
    <Field label={label} hint={hint} error={fault(field)}>
      {(ids) => (
        <input className="field num" inputMode="text" autoComplete="off" {...ids} {...register(at(field))} />
      )}
    </Field>
  );

  return (
    <fieldset className="grid gap-3 border-t border-hairline pt-3">
      <legend className="sr-only">{name}</legend>
      <div className="flex flex-wrap items-center justify-between gap-3">
        <span className="text-[15px] font-semibold" aria-hidden="true">
          {name}
        </span>
        <div className="flex items-center gap-3">
          <label className="flex items-center gap-2">
            <span className="text-[13px] text-muted">A breach</span>
            <select className="field w-auto!" {...register(at('breach'))}>
              <option value="reject">rejects</option>
              <option value="advise">advises</option>
            </select>
          </label>
          <button type="button" className="btn btn-quiet" aria-label={`Remove ${name}`} onClick={onRemove}>
            Remove
          </button>
        </div>
      </div>
      <div className="grid gap-x-8 gap-y-3 lg:grid-cols-[minmax(0,1fr)_minmax(0,34rem)]">
        <div
          className={`grid content-start gap-3 ${rule.kind === 'integrated' ? 'sm:grid-cols-2' : 'sm:grid-cols-3'}`}
        >
          {rule.kind === 'integrated' && (
            <>
              {input('targetLufs', `Target (${unit})`)}
              {input('toleranceAboveLu', 'Above it at most (LU)')}
              {input('toleranceBelowLu', 'Below it at most (LU)', 'Empty: no lower limit')}
            </>
          )}
          {rule.kind === 'limits' && (
            <>
              {input('atLeast', withUnit('At least', unit), 'Empty: no lower limit')}
              {input('atMost', withUnit('At most', unit), 'Empty: no upper limit')}
            </>
          )}
          {rule.kind === 'limits' && isSilence(rule.metric) && (
            <Field label="Silent under (dBFS)" hint="RMS of 10 ms, every audio channel">
              {(ids) => (
                <select className="field" {...ids} {...register(at('silenceLevelDbfs'))}>
                  {silenceLevelsDbfs.map((level) => (
                    <option key={level} value={level}>
                      {formatLimit(level).replace(/\.0$/, '')}
                    </option>
                  ))}
                </select>
              )}
            </Field>
          )}
          {rule.kind === 'limits' && isClipping(rule.metric) && (
            <Field label="Runs of at least (samples)" hint="One after another at full scale">
              {(ids) => (
                <select className="field" {...ids} {...register(at('clippedSamples'))}>
                  {clippedLengths.map((samples) => (
                    <option key={samples} value={samples}>
                      {samples}
                    </option>
                  ))}
                </select>
              )}
            </Field>
          )}
          {rule.kind === 'oneOf' && (
            <div className="sm:col-span-3">{input('allowed', 'One of', factHints[rule.fact] ?? '')}</div>
          )}
          {rule.kind === 'finding' && (
            <p className="text-muted sm:col-span-3">A file with this finding breaches the rule.</p>
          )}
          {isNumeric &&
            input('measurementTolerance', withUnit('Measurement tolerance', marginUnit), '0: off')}
          {rule.kind === 'limits' && rule.metric === 'rangeLu' && (
            <label className="flex items-center gap-2 sm:col-span-3">
              <input type="checkbox" {...register(at('judgeShortProgrammes'))} />
              Judge programmes of under 60 s too
            </label>
          )}
        </div>
        {isNumeric && <Line rule={rule} metric={metric} name={name} unit={unit} put={put} />}
      </div>
    </fieldset>
  );
}

/** The recess that the typed limits cut, which can be dragged; nothing while a limit is no number. */
function Line({
  rule,
  metric,
  name,
  unit,
  put,
}: {
  rule: RuleForm;
  metric: RangeMetric;
  name: string;
  unit: string;
  put: (name: keyof RuleForm, value: number | null) => void;
}) {
  if (rule.kind === 'limits') {
    const limits = { atLeast: finite(rule.atLeast), atMost: finite(rule.atMost) };
    if (
      (limits.atLeast === null && limits.atMost === null) ||
      (limits.atLeast ?? -Infinity) > (limits.atMost ?? Infinity)
    )
      return <p className="self-center text-muted">The load line is drawn as soon as there is a limit.</p>;
    return (
      <LoadLineEditor
        metric={metric}
        unit={unit}
        label={name}
        {...limits}
        step={steps[metric] ?? 0.1}
        onChange={({ atLeast, atMost }) => {
          put('atLeast', atLeast);
          put('atMost', atMost);
        }}
      />
    );
  }
  const target = finite(rule.targetLufs);
  const above = finite(rule.toleranceAboveLu);
  const below = finite(rule.toleranceBelowLu);
  if (target === null || above === null || above < 0 || (below ?? 0) < 0)
    return <p className="self-center text-muted">The load line is drawn as soon as there is a target.</p>;
  const atMost = tidy(target + above);
  const atLeast = below === null ? null : tidy(target - below);
  return (
    <LoadLineEditor
      metric={metric}
      unit={unit}
      label={name}
      atLeast={atLeast}
      atMost={atMost}
      target={target}
      onChange={(next) => {
        const high = next.atMost ?? atMost;
        // Both walls moved alike: the target goes with them. One alone: the target stays, unless the wall pushes it.
        const movedBoth = high !== atMost && (atLeast === null || next.atLeast !== atLeast);
        const pushed = Math.min(high, Math.max(next.atLeast ?? -Infinity, target));
        const aim = movedBoth && atLeast !== null ? target + (high - atMost) : pushed;
        put('targetLufs', aim);
        put('toleranceAboveLu', high - aim);
        put('toleranceBelowLu', next.atLeast === null ? null : aim - next.atLeast);
      }}
    />
  );
}
