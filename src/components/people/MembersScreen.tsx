import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { roleNames, type Role } from '@/domain/vocabulary.ts';
import { InviteForm } from './InviteForm.tsx';
import {
  endSessions,
  listMembers,
  takeBackInvitation,
  type Invitation,
  type Member,
  type MemberList,
} from './member-calls.ts';
import { RemoveDialog, RolesDialog } from './MemberDialogs.tsx';

interface Props {
  /** As the server read it for this page, so that the list stands before and without script. */
  initial: MemberList;
  possibleRoles: readonly Role[];
  ownUserId: string;
  timeZone: string;
}

const rolesInWords = (roles: readonly Role[]) => roles.map((role) => roleNames[role]).join(', ');
const cell = 'border-b border-hairline py-1.5 pr-4 align-baseline max-md:block max-md:border-0 max-md:py-0.5';

function Screen({ initial, possibleRoles, ownUserId, timeZone }: Props) {
  const client = useQueryClient();
  const { data } = useQuery({ queryKey: ['members'], queryFn: listMembers, initialData: initial });
  const [open, setOpen] = useState<{ what: 'roles' | 'remove'; member: Member } | null>(null);
  const [said, setSaid] = useState<{ text: string; isRefusal: boolean } | null>(null);
  const moment = new Intl.DateTimeFormat('en-GB', { timeZone, dateStyle: 'medium', timeStyle: 'short' });

  const tell = (text: string) => {
    setOpen(null);
    setSaid({ text, isRefusal: false });
    void client.invalidateQueries({ queryKey: ['members'] });
  };
  const refused = (error: Error) => setSaid({ text: error.message, isRefusal: true });
  const ending = useMutation({
    mutationFn: (member: Member) => endSessions(member.id),
    onSuccess: ({ ended }, member) => {
      // One's own session is among them.
      if (member.userId === ownUserId) return window.location.assign('/sign-in?callbackUrl=/members');
      tell(
        `${member.name} is signed out: ${ended === 1 ? 'one session' : `${ended} sessions`} ended. They may sign in again.`,
      );
    },
    onError: refused,
  });
  const takingBack = useMutation({
    mutationFn: (invitation: Invitation) => takeBackInvitation(invitation.id),
    onSuccess: (_, invitation) =>
      tell(`The invitation of ${invitation.email} is taken back: its link works no more.`),
    onError: refused,
  });

  return (
    <div className="grid gap-8">
      {/* Always there, so that what is put into it is read out. */}
      <div aria-live="polite" className="empty:hidden">
        {said && <Notice tone={said.isRefusal ? 'refused' : 'told'}>{said.text}</Notice>}
      </div>
      <div>
        <table className="w-full text-left">
          <caption className="sr-only">Members</caption>
          <thead className="text-[13px] text-muted max-md:sr-only">
            <tr>
              <th scope="col" className={`${cell} font-medium`}>
                Name
              </th>
              <th scope="col" className={`${cell} font-medium`}>
                Roles
              </th>
              <th scope="col" className={`${cell} font-medium`}>
                Last seen
              </th>
              <th scope="col" className={`${cell} font-medium`}>
                Open sessions
              </th>
              <th scope="col" className={`${cell} pr-0`}>
                <span className="sr-only">Actions</span>
              </th>
            </tr>
          </thead>
          <tbody>
            {data.items.map((member) => (
              <tr key={member.id} className="max-md:block max-md:border-b max-md:border-hairline max-md:py-2">
                <th scope="row" className={`${cell} font-normal`}>
                  <span className="font-medium">{member.name}</span>
                  {member.userId === ownUserId && <span className="text-muted"> (you)</span>}
                  <span className="block text-[13px] break-words text-muted">{member.email}</span>
                </th>
                <td className={cell}>{rolesInWords(member.roles)}</td>
                <td className={`${cell} num max-md:hidden!`}>
                  {member.lastSeenAt ? moment.format(new Date(member.lastSeenAt)) : 'never'}
                </td>
                <td className={`${cell} num max-md:hidden!`}>{member.openSessions}</td>
                <td className={`${cell} pr-0`}>
                  <div className="flex flex-wrap gap-2 md:flex-nowrap md:justify-end">
                    <button
                      type="button"
                      className="btn btn-quiet"
                      aria-label={`Roles of ${member.name}`}
                      onClick={() => setOpen({ what: 'roles', member })}
                    >
                      Roles
                    </button>
                    <button
                      type="button"
                      className="btn btn-quiet"
                      aria-label={`End the sessions of ${member.name}`}
                      disabled={ending.isPending || member.openSessions === 0}
                      onClick={() => ending.mutate(member)}
                    >
                      End sessions
                    </button>
                    <button
                      type="button"
                      className="btn btn-quiet"
                      aria-label={`Remove ${member.name}`}
                      onClick={() => setOpen({ what: 'remove', member })}
                    >
                      Remove
                    </button>
                  </div>
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      </div>
      <div className="grid gap-10 md:grid-cols-2">
        <InviteForm
          possible={possibleRoles}
          onInvited={({ email }) => tell(`An invitation is on its way to ${email}.`)}
        />
        <section aria-labelledby="open-head" className="grid content-start gap-2">
          <h2 id="open-head" className="text-[17px] font-semibold">
            Open invitations
          </h2>
          {data.invitations.length === 0 && <p className="text-muted">Nobody is invited at the moment.</p>}
          <ul>
            {data.invitations.map((invitation) => (
              <li
                key={invitation.id}
                className="flex flex-wrap items-baseline justify-between gap-x-4 gap-y-1 border-b border-hairline py-1.5"
              >
                <span>
                  <span className="break-words">{invitation.email}</span>
                  <span className="block text-[13px] text-muted">
                    {rolesInWords(invitation.roles)}, until {moment.format(new Date(invitation.expiresAt))}
                  </span>
                </span>
                <button
                  type="button"
                  className="btn btn-quiet"
                  aria-label={`Take back the invitation of ${invitation.email}`}
                  disabled={takingBack.isPending}
                  onClick={() => takingBack.mutate(invitation)}
                >
                  Take back
                </button>
              </li>
            ))}
          </ul>
        </section>
      </div>
      {open?.what === 'roles' && (
        <RolesDialog
          member={open.member}
          possible={possibleRoles}
          onClose={() => setOpen(null)}
          onDone={tell}
        />
      )}
      {open?.what === 'remove' && (
        <RemoveDialog member={open.member} onClose={() => setOpen(null)} onDone={tell} />
      )}
    </div>
  );
}

/** Members of the organisation with what an administrator does about them. */
export default function MembersScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}
