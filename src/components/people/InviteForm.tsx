import { zodResolver } from '@hookform/resolvers/zod';
import { useMutation } from '@tanstack/react-query';
import { Controller, useForm } from 'react-hook-form';
import type { z } from 'zod';
import { inviteSchema } from '@/domain/api/people.ts';
import type { Role } from '@/domain/vocabulary.ts';
import { ApiProblem } from '@/components/live/api.ts';
import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { invite, type Invitation } from './member-calls.ts';
import { RoleTicks } from './RoleTicks.tsx';

interface Props {
  possible: readonly Role[];
  onInvited(invitation: Invitation): void;
}

/** Who is invited and as what. What was typed stays until the server has taken it. */
export function InviteForm({ possible, onInvited }: Props) {
  const form = useForm<z.input<typeof inviteSchema>, unknown, z.output<typeof inviteSchema>>({
    resolver: zodResolver(inviteSchema),
    defaultValues: { email: '', roles: possible.length === 1 ? [...possible] : [] },
  });
  const sending = useMutation({
    mutationFn: invite,
    onSuccess: (invitation) => {
      form.reset();
      onInvited(invitation);
    },
    onError: (error) => {
      const fields = error instanceof ApiProblem ? error.fields : {};
      if (fields.email) form.setError('email', { message: fields.email }, { shouldFocus: true });
      else if (fields.roles) form.setError('roles', { message: fields.roles });
      else form.setError('root', { message: error.message });
    },
  });
  const { errors } = form.formState;
  return (
    <form
      noValidate
      aria-labelledby="invite-head"
      className="grid content-start gap-4"
      onSubmit={(event) => void form.handleSubmit((asked) => sending.mutate(asked))(event)}
    >
      <h2 id="invite-head" className="text-[17px] font-semibold">
        Invite somebody
      </h2>
      <Field label="E-mail" error={errors.email?.message}>
        {(ids) => (
          <input type="email" autoComplete="off" className="field" {...ids} {...form.register('email')} />
        )}
      </Field>
      <Controller
        control={form.control}
        name="roles"
        render={({ field: { value, onChange } }) => (
          <RoleTicks
            idPrefix="invite-roles"
            possible={possible}
            picked={value}
            onChange={onChange}
            error={errors.roles?.message}
          />
        )}
      />
      {errors.root && <Notice tone="refused">{errors.root.message}</Notice>}
      <button type="submit" className="btn btn-main justify-self-start" disabled={sending.isPending}>
        {sending.isPending ? 'Sending…' : 'Send the invitation'}
      </button>
      <p className="text-[13px] text-muted">They get a mail with a link that works once, within a week.</p>
    </form>
  );
}
