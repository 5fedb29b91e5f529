import { useId } from 'react';
import { Field } from '@/components/look/Field.tsx';
import { momentIn } from '@/domain/zoned-time.ts';

export interface MomentChoice {
  atOnce: boolean;
  /** As typed: 'YYYY-MM-DDTHH:mm' of the zone's clock. */
  clock: string;
}
export const atOnce: MomentChoice = { atOnce: true, clock: '' };

/** The moment chosen as the API takes it, or what is wrong with it. */
export function readMoment(
  { atOnce, clock }: MomentChoice,
  zone: string,
): { moment: string | null } | { error: string } {
  if (atOnce) return { moment: null };
  if (clock === '') return { error: 'Give a date and time, or choose "at once".' };
  const moment = momentIn(zone, clock);
  if (!moment) return { error: 'The clocks of this zone never show this time. Choose another.' };
  if (moment.getTime() < Date.now())
    return { error: 'This moment has gone by. Choose one to come, or "at once".' };
  return { moment: moment.toISOString() };
}

interface Props {
  value: MomentChoice;
  onChange: (choice: MomentChoice) => void;
  zone: string;
  error?: string;
}

/** At once, or from a moment of the zone's clock. */
export function MomentField({ value, onChange, zone, error }: Props) {
  const name = useId();
  return (
    <fieldset className="grid gap-2">
      <legend className="mb-1 text-[13px] font-medium">In force</legend>
      <label className="flex items-center gap-2">
        <input
          type="radio"
          name={name}
          checked={value.atOnce}
          onChange={() => onChange({ ...value, atOnce: true })}
        />
        at once
      </label>
      <label className="flex items-center gap-2">
        <input
          type="radio"
          name={name}
          checked={!value.atOnce}
          onChange={() => onChange({ ...value, atOnce: false })}
        />
        from a date
      </label>
      {!value.atOnce && (
        <Field label="Date and time" hint={`By the clock of ${zone}`} error={error}>
          {(ids) => (
            <input
              type="datetime-local"
              className="field max-w-64"
              value={value.clock}
              onChange={(event) => onChange({ atOnce: false, clock: event.target.value })}
              {...ids}
            />
          )}
        </Field>
      )}
    </fieldset>
  );
}
