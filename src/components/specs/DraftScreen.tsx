import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { FormProvider, useFieldArray, useForm } from 'react-hook-form';
import { api, ApiProblem } from '@/components/live/api.ts';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { specDetailSchema, type SpecDetail } from '@/domain/api/specs.ts';
import { signalMetrics } from '@/domain/spec.ts';
import { monoText, roundingText } from '@/domain/spec-changes.ts';
import { plainBody } from '@/domain/starting-specs.ts';
import { integrityCodes, signalCodes } from '@/engine/figures.ts';
import {
  draftResolver,
  formOf,
  isFact,
  isFinding,
  newRule,
  ruleSubjects,
  type Draft,
  type DraftForm,
  type RuleSubject,
} from './draft-form.ts';
import { publishedText, PublishDialog } from './PublishDialog.tsx';
import { RuleFields, subjectName } from './RuleFields.tsx';

interface Props {
  initial: SpecDetail;
  timeZone: string;
}

const draftOf = (spec: SpecDetail) => spec.versions.find(({ number }) => number === null) ?? null;
const isOneOf = (subjects: readonly string[]) => (subject: RuleSubject) => subjects.includes(subject);
const isOfSignal = isOneOf(signalMetrics);
const subjectGroups: [string, (subject: RuleSubject) => boolean][] = [
  ['Figures', (subject) => !isFact(subject) && !isFinding(subject) && !isOfSignal(subject)],
  ['The signal', isOfSignal],
  ['Facts of the file', isFact],
  ['Integrity', isOneOf(integrityCodes)],
  ['Findings of the signal', isOneOf(signalCodes)],
];
const nameOfSubject = (subject: RuleSubject) => subjectName(newRule(subject, []));

function Screen({ initial, timeZone }: Props) {
  const [spec, setSpec] = useState(initial);
  const draft = draftOf(spec);
  const [publishing, setPublishing] = useState(false);
  const [said, setSaid] = useState<string | null>(null);
  const [isOver, setIsOver] = useState(false);
  const from = draft?.body ?? spec.current?.body ?? spec.versions[0]?.body ?? plainBody;
  const form = useForm<DraftForm, unknown, Draft>({
    resolver: draftResolver,
    defaultValues: formOf(from, draft?.changeNote ?? ''),
  });
  const { register, formState } = form;
  const rules = useFieldArray({ control: form.control, name: 'rules', keyName: 'key' });
  const saving = useMutation({
    mutationFn: (saved: Draft) =>
      api.send(
        'PUT',
        `/api/v1/specs/${spec.id}/draft`,
        { ...saved, seenUpdatedAt: draft?.updatedAt ?? null },
        specDetailSchema,
      ),
    onSuccess: (detail) => {
      setSpec(detail);
      form.reset(form.getValues());
      setSaid('Saved. The draft judges nothing until it is published.');
    },
    onError: (error) => {
      setSaid(null);
      const fields = error instanceof ApiProblem ? Object.keys(error.fields) : [];
      form.setError('root', {
        message: fields.length > 0 ? `${error.message} (${fields.join(', ')})` : error.message,
      });
    },
  });
  const save = (then?: () => void) =>
    void form.handleSubmit(
      (saved) => saving.mutate(saved, { onSuccess: then }),
      () => setSaid(null),
    )();

  if (isOver)
    return (
      <div className="grid gap-4">
        <h1>{spec.name}</h1>
        {said && <Notice>{said}</Notice>}
        <p>
          <a href={`/specs/${spec.id}`} className="btn btn-main no-underline">
            See the spec
          </a>
        </p>
      </div>
    );

  const faults = Object.keys(formState.errors).some((name) => name !== 'root');
  return (
    <FormProvider {...form}>
      <form
        noValidate
        className="grid gap-6"
        onSubmit={(event) => {
          event.preventDefault();
          save();
        }}
      >
        <div className="flex flex-wrap items-start justify-between gap-3">
          <div>
            <p className="text-[13px]">
              <a href="/specs" className="underline decoration-hairline decoration-2 underline-offset-2">
                Specs
              </a>{' '}
              <span className="text-muted">/</span>{' '}
              <a
                href={`/specs/${spec.id}`}
                className="underline decoration-hairline decoration-2 underline-offset-2"
              >
                {spec.name}
              </a>
            </p>
            <h1>{draft ? 'Draft' : 'New version'}</h1>
          </div>
          <div className="flex flex-wrap items-center gap-2">
            {formState.isDirty && <span className="text-[13px] text-muted">not saved</span>}
            <button type="submit" className="btn" disabled={saving.isPending}>
              {saving.isPending ? 'Saving…' : 'Save the draft'}
            </button>
            <button
              type="button"
              className="btn btn-main"
              disabled={saving.isPending}
              onClick={() => save(() => setPublishing(true))}
            >
              Save and publish…
            </button>
          </div>
        </div>
        <div aria-live="polite" className="empty:hidden">
          {said && !formState.errors.root && <Notice>{said}</Notice>}
        </div>
        {formState.errors.root && <Notice tone="refused">{formState.errors.root.message}</Notice>}
        {faults && (
          <Notice tone="refused">
            Some inputs need another look: each says what is wrong. Nothing was saved.
          </Notice>
        )}

        <section aria-labelledby="frame-head" className="grid gap-3">
          <h2 id="frame-head" className="text-[17px] font-semibold">
            How it judges
          </h2>
          <div className="grid gap-4 sm:grid-cols-3">
            <Field label="Loudness is written in">
              {(ids) => (
                <select className="field" {...ids} {...register('unit')}>
                  <option value="LUFS">LUFS</option>
                  <option value="LKFS">LKFS</option>
                </select>
              )}
            </Field>
            <Field label="Rules judge">
              {(ids) => (
                <select className="field" {...ids} {...register('rounding')}>
                  <option value="shown">{roundingText.shown}</option>
                  <option value="unrounded">{roundingText.unrounded}</option>
                </select>
              )}
            </Field>
            <Field label="One-channel files are judged">
              {(ids) => (
                <select className="field" {...ids} {...register('mono')}>
                  <option value="asOne">{monoText.asOne}</option>
                  <option value="asDual">{monoText.asDual}</option>
                </select>
              )}
            </Field>
          </div>
        </section>

        <section aria-labelledby="rules-head" className="grid gap-4">
          <div className="flex flex-wrap items-end justify-between gap-3">
            <h2 id="rules-head" className="text-[17px] font-semibold">
              Rules
            </h2>
            <AddRule
              onAdd={(subject) => {
                const taken = form.getValues('rules').map(({ id }) => id);
                rules.append(newRule(subject, taken));
              }}
            />
          </div>
          {rules.fields.length === 0 && (
            <p className="text-muted">A spec needs one rule at least. Add one.</p>
          )}
          {rules.fields.map((field, index) => (
            <RuleFields key={field.key} index={index} onRemove={() => rules.remove(index)} />
          ))}
        </section>

        <section aria-labelledby="source-head" className="grid gap-3 border-t border-hairline pt-3">
          <h2 id="source-head" className="text-[17px] font-semibold">
            Source and note
          </h2>
          <div className="grid gap-4 sm:grid-cols-2">
            <Field
              label="Published document"
              hint="Empty where there is none"
              error={formState.errors.source?.document?.message}
            >
              {(ids) => <input className="field" {...ids} {...register('source.document')} />}
            </Field>
            <Field label="Edition" error={formState.errors.source?.edition?.message}>
              {(ids) => <input className="field" {...ids} {...register('source.edition')} />}
            </Field>
            <Field label="About the source" error={formState.errors.source?.note?.message}>
              {(ids) => <textarea className="field" rows={3} {...ids} {...register('source.note')} />}
            </Field>
            <Field
              label="What this version changes"
              hint="Suppliers read it"
              error={formState.errors.changeNote?.message}
            >
              {(ids) => <textarea className="field" rows={3} {...ids} {...register('changeNote')} />}
            </Field>
          </div>
        </section>
      </form>
      {publishing && (
        <PublishDialog
          spec={spec}
          timeZone={timeZone}
          onClose={() => setPublishing(false)}
          onDone={(result) => {
            setPublishing(false);
            setSpec(result.spec);
            setSaid(publishedText(result));
            setIsOver(true);
          }}
        />
      )}
    </FormProvider>
  );
}

function AddRule({ onAdd }: { onAdd: (subject: RuleSubject) => void }) {
  const [subject, setSubject] = useState<RuleSubject>('truePeakDbtp');
  return (
    <div className="flex items-end gap-2">
      <Field label="Another rule about">
        {(ids) => (
          <select
            className="field"
            value={subject}
            onChange={(event) =>
              setSubject(ruleSubjects.find((one) => one === event.target.value) ?? 'truePeakDbtp')
            }
            {...ids}
          >
            {subjectGroups.map(([label, belongs]) => (
              <optgroup key={label} label={label}>
                {ruleSubjects.filter(belongs).map((one) => (
                  <option key={one} value={one}>
                    {nameOfSubject(one)}
                  </option>
                ))}
              </optgroup>
            ))}
          </select>
        )}
      </Field>
      <button type="button" className="btn" onClick={() => onAdd(subject)}>
        Add
      </button>
    </div>
  );
}

/** The form of a spec's next version. What is typed stays until it is saved. */
export default function DraftScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}
