import { zodResolver } from '@hookform/resolvers/zod';
import { useMutation } from '@tanstack/react-query';
import { useForm } from 'react-hook-form';
import type { z } from 'zod';
import { api, ApiProblem } from '@/components/live/api.ts';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { channelRowSchema, createChannelSchema, type ChannelRow } from '@/domain/api/specs.ts';
import { channelKindNames, channelKinds } from '@/domain/vocabulary.ts';

type Form = z.input<typeof createChannelSchema>;

interface Props {
  /** The channel that is changed; left out for a new one. */
  channel?: ChannelRow;
  timeZone: string;
  onClose: () => void;
  onDone: (channel: ChannelRow) => void;
}

/** Name, kind and time zone of a channel, new or there already. */
export function ChannelDialog({ channel, timeZone, onClose, onDone }: Props) {
  const form = useForm<Form, unknown, z.output<typeof createChannelSchema>>({
    resolver: zodResolver(createChannelSchema),
    defaultValues: channel
      ? { name: channel.name, kind: channel.kind, timeZone: channel.timeZone }
      : { name: '', kind: 'television', timeZone },
  });
  const saving = useMutation({
    mutationFn: (asked: z.output<typeof createChannelSchema>) =>
      channel
        ? api.send('PATCH', `/api/v1/channels/${channel.id}`, asked, channelRowSchema)
        : api.send('POST', '/api/v1/channels', asked, channelRowSchema),
    onSuccess: onDone,
    onError: (error) => {
      const fields = error instanceof ApiProblem ? error.fields : {};
      if (fields.name) form.setError('name', { message: fields.name }, { shouldFocus: true });
      else form.setError('root', { message: error.message });
    },
  });
  const { errors } = form.formState;
  return (
    <Dialog title={channel ? `Change ${channel.name}` : 'New channel'} onClose={onClose}>
      <form
        noValidate
        className="grid gap-4"
        onSubmit={(event) => void form.handleSubmit((asked) => saving.mutate(asked))(event)}
      >
        <Field label="Name" error={errors.name?.message}>
          {(ids) => <input className="field" {...ids} {...form.register('name')} />}
        </Field>
        <Field label="Kind" error={errors.kind?.message}>
          {(ids) => (
            <select className="field" {...ids} {...form.register('kind')}>
              {channelKinds.map((kind) => (
                <option key={kind} value={kind}>
                  {channelKindNames[kind]}
                </option>
              ))}
            </select>
          )}
        </Field>
        <Field label="Time zone" hint="Its dates are read in it" error={errors.timeZone?.message}>
          {(ids) => (
            <>
              <input
                className="field"
                list="zones"
                autoComplete="off"
                {...ids}
                {...form.register('timeZone')}
              />
              <datalist id="zones">
                {Intl.supportedValuesOf('timeZone').map((zone) => (
                  <option key={zone} value={zone} />
                ))}
              </datalist>
            </>
          )}
        </Field>
        {errors.root && <Notice tone="refused">{errors.root.message}</Notice>}
        <div className="flex gap-3">
          <button type="submit" className="btn btn-main" disabled={saving.isPending}>
            {saving.isPending ? 'Saving…' : channel ? 'Save' : 'Make the channel'}
          </button>
          <button type="button" className="btn btn-quiet" onClick={onClose}>
            Cancel
          </button>
        </div>
      </form>
    </Dialog>
  );
}
