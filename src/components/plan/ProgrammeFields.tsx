import { Field } from '@/components/look/Field.tsx';
import { readTimeInFile, timeInFile } from '@/domain/file-clock.ts';
import { frameRateNames, type FrameRateName } from '@/engine/timecode.ts';
import { clockOf, nextTime, withRate, type Format, type Made, type PlanForm } from './plan-form.ts';

interface Props {
  form: PlanForm;
  format: Format;
  /** Where a line-up tone at the head ends, in seconds of the file. */
  toneEndSeconds: number | null;
  fault: Extract<Made, { fault: string }> | null;
  onChange: (form: PlanForm) => void;
}

const isRate = (value: string): value is FrameRateName =>
  (frameRateNames as readonly string[]).includes(value);

/** Where the programme begins and ends in the file, so that tone, clock and leader stay out. */
export function ProgrammeFields({ form, format, toneEndSeconds, fault, onChange }: Props) {
  const clock = clockOf(format, form);
  const begins = timeInFile(clock, 0);
  const ends = timeInFile(clock, format.durationSeconds);
  const seconds = (text: string, otherwise: number) => {
    const read = text.trim() === '' ? null : readTimeInFile(clock, text);
    return read && 'seconds' in read ? read.seconds : otherwise;
  };
  const share = (value: number) => Math.min(1, Math.max(0, value / (format.durationSeconds || 1))) * 100;
  const left = share(seconds(form.from, 0));
  const right = share(seconds(form.to, format.durationSeconds));
  // A file that is all tone has no programme after it.
  const leavesProgramme = toneEndSeconds !== null && toneEndSeconds < format.durationSeconds - 1;
  const toneEnd = leavesProgramme ? nextTime(clock, toneEndSeconds) : null;
  return (
    <fieldset className="grid gap-3">
      <legend className="mb-1 text-[14px] font-semibold">Programme</legend>
      <p className="text-[13px] text-muted">
        The file runs from <span className="num text-ink">{begins}</span> to{' '}
        <span className="num text-ink">{ends}</span>
        {format.frameRate
          ? `, counted at ${format.frameRate} frames a second as it tells.`
          : '. It tells no frame rate; choose one to write times as timecode.'}
      </p>
      <div aria-hidden="true" className="relative h-4 border-t border-ink">
        {/* The measured stretch is a recess in the line of the file. */}
        <div
          className="absolute -top-px h-3 border border-t-0 border-ink bg-water"
          style={{ left: `${left}%`, width: `${Math.max(0, right - left)}%` }}
        />
      </div>
      {toneEnd !== null && toneEnd !== form.from && (
        <p className="flex flex-wrap items-center gap-3 border-l-[3px] border-brass bg-brass-wash px-3 py-2">
          <span>
            A line-up tone ends at <span className="num">{toneEnd}</span>.
          </span>
          <button
            type="button"
            className="btn btn-quiet"
            onClick={() => onChange({ ...form, from: toneEnd })}
          >
            Start after it
          </button>
        </p>
      )}
      <div className="grid gap-3 sm:grid-cols-3">
        <Field label="From" error={fault?.field === 'from' ? fault.fault : undefined}>
          {(ids) => (
            <input
              {...ids}
              className="field num"
              value={form.from}
              placeholder={begins}
              onChange={(event) => onChange({ ...form, from: event.target.value })}
            />
          )}
        </Field>
        <Field label="To" error={fault?.field === 'to' ? fault.fault : undefined}>
          {(ids) => (
            <input
              {...ids}
              className="field num"
              value={form.to}
              placeholder={ends}
              onChange={(event) => onChange({ ...form, to: event.target.value })}
            />
          )}
        </Field>
        {!format.frameRate && (
          <Field label="Frames a second">
            {(ids) => (
              <select
                {...ids}
                className="field"
                value={form.frameRate ?? ''}
                onChange={({ target: { value } }) =>
                  onChange(withRate(form, isRate(value) ? value : null, format))
                }
              >
                <option value="">none</option>
                {frameRateNames.map((name) => (
                  <option key={name} value={name}>
                    {name}
                  </option>
                ))}
              </select>
            )}
          </Field>
        )}
      </div>
      <p className="text-[13px] text-muted">
        {clock.rate ? 'As timecode' : 'As hours, minutes and seconds'}, or as seconds from the start of the
        file. Left empty: from its start, to its end.
      </p>
    </fieldset>
  );
}
