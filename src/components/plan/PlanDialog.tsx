import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { setPlanResultSchema, type DeliverableReport } from '@/domain/api/deliverables.ts';
import { timeInFile } from '@/domain/file-clock.ts';
import { planWords } from '@/domain/plan-words.ts';
import { wholeFile, type MeasuringPlan } from '@/engine/plan.ts';
import { ChannelFields } from './ChannelFields.tsx';
import { clockOf, formOf, planOf, type PlanForm } from './plan-form.ts';
import { ProgrammeFields } from './ProgrammeFields.tsx';

export type Measured = Pick<DeliverableReport, 'id' | 'plan' | 'frameRate' | 'plans' | 'state'> &
  NonNullable<DeliverableReport['file']>;

interface Props {
  measured: Measured;
  onClose: () => void;
}

/** Stream, programme and audio channels of one deliverable; "Measure again" makes a plan of them. */
export function PlanDialog({ measured, onClose }: Props) {
  const { id, plan, plans, format } = measured;
  const [form, setForm] = useState<PlanForm>(() => formOf(plan, measured.frameRate, format));
  const [isTried, setTried] = useState(false);
  const made = planOf(form, format);
  const fault = isTried && 'fault' in made ? made : null;
  const clock = clockOf(format, form);
  const earlier = [{ plan: wholeFile }, ...plans].filter(
    (one) => JSON.stringify(one.plan) !== JSON.stringify(plan),
  );
  const show = (next: MeasuringPlan) => setForm(formOf(next, form.frameRate, format));
  const sending = useMutation({
    mutationFn: (wanted: MeasuringPlan) =>
      api.send(
        'PUT',
        `/api/v1/deliverables/${id}/plan`,
        { plan: wanted, frameRate: form.frameRate },
        setPlanResultSchema,
      ),
    onSuccess: ({ how }) => {
      // Nothing was changed but perhaps how times are written.
      if (how === 'same' && form.frameRate === measured.frameRate) onClose();
      // Another presentation may stand at the place that the address names.
      else location.assign(location.pathname);
    },
  });
  const streams = format.streams ?? [];
  return (
    <Dialog title="How it is measured" onClose={onClose} wide>
      <form
        className="grid min-w-0 gap-6"
        onSubmit={(event) => {
          event.preventDefault();
          setTried(true);
          if ('plan' in made) sending.mutate(made.plan);
        }}
      >
        {streams.length > 1 && (
          <fieldset className="grid gap-1">
            <legend className="mb-1 text-[14px] font-semibold">Audio stream</legend>
            {streams.map((stream, i) => (
              <label key={i} className="flex items-center gap-2 py-0.5">
                <input
                  type="radio"
                  name="stream"
                  className="accent-teal"
                  checked={form.stream === i}
                  onChange={() => setForm({ ...form, stream: i, choice: 'told', columns: [] })}
                />
                <span className="num w-5 text-right">{i + 1}</span>
                <span>
                  {[stream.title, stream.language, `${stream.codec}, ${stream.layout}`]
                    .filter(Boolean)
                    .join(' · ')}
                </span>
              </label>
            ))}
          </fieldset>
        )}
        <ProgrammeFields
          form={form}
          format={format}
          toneEndSeconds={measured.lineUpToneEndSeconds}
          fault={fault}
          onChange={setForm}
        />
        <ChannelFields
          form={form}
          format={format}
          told={streams[form.stream]?.layout ?? format.layout}
          isAssumed={measured.isOrderAssumed}
          fault={fault}
          onChange={setForm}
        />
        {earlier.length > 0 && (
          <section className="grid gap-1">
            <h3 className="text-[14px] font-semibold">Measured before</h3>
            <ul className="grid gap-1 text-[13px]">
              {earlier.map((one, i) => (
                <li key={i} className="flex flex-wrap items-baseline justify-between gap-x-4">
                  <span>{capital(planWords(one.plan, (seconds) => timeInFile(clock, seconds)))}</span>
                  <button
                    type="button"
                    className="text-teal underline underline-offset-4"
                    onClick={() => show(one.plan)}
                  >
                    Fill in
                  </button>
                </li>
              ))}
            </ul>
          </section>
        )}
        {fault?.field === 'plan' && <Notice tone="refused">{fault.fault}</Notice>}
        {sending.error && (
          <Notice tone="refused">{sending.error.message} What you have set is kept here.</Notice>
        )}
        <div className="flex flex-wrap items-center justify-between gap-3">
          <p className="max-w-96 text-[13px] text-muted">
            Measurements are kept: going back to an earlier way shows its figures at once.
          </p>
          <div className="flex gap-2">
            <button type="button" className="btn btn-quiet" onClick={onClose}>
              Cancel
            </button>
            <button type="submit" className="btn btn-main" disabled={sending.isPending}>
              {sending.isPending ? 'Sending…' : 'Measure again'}
            </button>
          </div>
        </div>
      </form>
    </Dialog>
  );
}

const capital = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);
