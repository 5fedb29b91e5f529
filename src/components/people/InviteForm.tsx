import { zodResolver } from '@hookform/resolvers/zod';
import { useMutation } from '@tanstack/react-query';
import { Controller, useForm } from 'react-hook-form';
import type { z } from 'zod';
import { inviteSchema } from '@/domain/api/people.ts';
import type { Role } from '@/domain/vocabulary.ts';
import { field, mainButton } from './look.ts';
import { invite, RefusedCall, type Invitation } from './member-calls.ts';
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
      const fields = error instanceof RefusedCall ? error.fields : {};
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
      <h2 id="invite-head" className="text-lg font-semibold">
        Invite somebody
      </h2>
      <div className="grid gap-1">
        <label htmlFor="invite-email" className="text-sm font-medium">
          E-mail
        </label>
        <input
          id="invite-email"
          type="email"
          autoComplete="off"
          className={`${field} ${errors.email ? 'border-hull' : 'border-muted'}`}
          aria-invalid={errors.email ? true : undefined}
          aria-describedby={errors.email ? 'invite-email-error' : undefined}
          {...form.register('email')}
        />
        {errors.email && (
          <p id="invite-email-error" className="text-sm text-hull">
            {errors.email.message}
          </p>
        )}
      </div>
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
      {errors.root && (
        <p role="alert" className="text-sm text-hull">
          {errors.root.message}
        </p>
      )}
      <button type="submit" className={`${mainButton} justify-self-start`} disabled={sending.isPending}>
        {sending.isPending ? 'Sending…' : 'Send the invitation'}
      </button>
      <p className="text-sm text-muted">They get a mail with a link that works once, within a week.</p>
    </form>
  );
}
