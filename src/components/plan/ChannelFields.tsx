import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { layoutOfCount } from '@/engine/layouts.ts';
import { orderChoices, speakersOfNames, splitChoices, type Choice } from '@/engine/presentations.ts';
import { PatchGrid } from './PatchGrid.tsx';
import { channelsOf, columnsOf, type Format, type Made, type PlanForm } from './plan-form.ts';

interface Props {
  form: PlanForm;
  format: Format;
  /** Layout that the file tells, or that is assumed. */
  told: string;
  isAssumed: boolean;
  fault: Extract<Made, { fault: string }> | null;
  onChange: (form: PlanForm) => void;
}

/** What the names of the tracks tell goes first. */
function choicesOf(format: Format, channels: number): { name: string; choices: Choice[] }[] {
  const names = format.trackNames ?? [];
  const speakers = names.length === channels ? speakersOfNames(names) : null;
  const named: Choice[] = speakers
    ? [
        {
          id: 'names',
          label: `As the tracks are named: ${speakers.join(' ')}`,
          presentations: [{ name: 'Full mix', audioChannels: speakers.map((_, i) => i), speakers }],
        },
      ]
    : [];
  return [
    { name: 'One presentation', choices: [...named, ...orderChoices(channels)] },
    { name: 'Several presentations', choices: splitChoices(channels) },
  ].filter(({ choices }) => choices.length > 0);
}

/** How the audio channels play: as the file tells, in another order, or split into presentations. */
export function ChannelFields({ form, format, told, isAssumed, fault, onChange }: Props) {
  const channels = channelsOf(format, form.stream);
  const groups = choicesOf(format, channels);
  const all = groups.flatMap(({ choices }) => choices);
  const choose = (id: string) => {
    const choice = all.find((one) => one.id === id);
    const usual = {
      name: 'Full mix',
      audioChannels: Array.from({ length: channels }, (_, i) => i),
      speakers: [...layoutOfCount(channels).speakers],
    };
    const kept = form.columns.length > 0 ? form.columns : columnsOf([usual], channels);
    onChange({
      ...form,
      choice: id,
      columns: choice ? columnsOf(choice.presentations, channels) : id === 'told' ? [] : kept,
    });
  };
  const add = () =>
    onChange({
      ...form,
      choice: 'own',
      columns: [
        ...form.columns,
        {
          name: `Presentation ${form.columns.length + 1}`,
          speakers: new Array<null>(channels).fill(null),
        },
      ],
    });
  return (
    <fieldset className="grid min-w-0 gap-3">
      <legend className="mb-1 text-[14px] font-semibold">Audio channels</legend>
      <Field
        label={`The ${channels === 1 ? 'one audio channel plays' : `${channels} audio channels play`}`}
        hint={
          form.choice === 'told' && isAssumed
            ? 'The file does not tell its order; the usual one is assumed. Choose another where it is wrong.'
            : undefined
        }
      >
        {(ids) => (
          <select
            {...ids}
            className="field"
            value={form.choice}
            onChange={(event) => choose(event.target.value)}
          >
            <option value="told">
              {isAssumed ? `in the usual order (${told})` : `as the file tells (${told})`}
            </option>
            {groups.map(({ name, choices }) => (
              <optgroup key={name} label={name}>
                {choices.map(({ id, label }) => (
                  <option key={id} value={id}>
                    {label}
                  </option>
                ))}
              </optgroup>
            ))}
            <option value="own">as set below</option>
          </select>
        )}
      </Field>
      {form.choice !== 'told' && (
        <>
          <PatchGrid
            trackNames={Array.from({ length: channels }, (_, i) => format.trackNames?.[i] ?? '')}
            columns={form.columns}
            onChange={(columns) => onChange({ ...form, choice: 'own', columns })}
          />
          <div className="flex flex-wrap items-center justify-between gap-3">
            <p className="text-[13px] text-muted">
              Each presentation is measured and judged on its own. An audio channel may be in several, or in
              none.
            </p>
            <button type="button" className="btn btn-quiet" onClick={add}>
              Add a presentation
            </button>
          </div>
        </>
      )}
      {fault?.field === 'presentations' && <Notice tone="refused">{fault.fault}</Notice>}
    </fieldset>
  );
}
