import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import type { Role } from '@/domain/vocabulary.ts';
import { removeMember, setRoles, type Member } from './member-calls.ts';
import { RoleTicks } from './RoleTicks.tsx';

const Refusal = ({ error }: { error: Error | null }) =>
  error && <Notice tone="refused">{error.message}</Notice>;

interface DialogProps {
  member: Member;
  onClose(): void;
  /** Called after the server has done it, with a sentence for the person. */
  onDone(said: string): void;
}

export function RolesDialog({
  member,
  possible,
  onClose,
  onDone,
}: DialogProps & { possible: readonly Role[] }) {
  const [picked, setPicked] = useState<Role[]>(member.roles);
  const saving = useMutation({
    mutationFn: () => setRoles(member.id, picked),
    onSuccess: () => onDone(`${member.name}'s roles are changed. They count from the next page on.`),
  });
  return (
    <Dialog title={`Roles of ${member.name}`} onClose={onClose}>
      <RoleTicks
        idPrefix="roles"
        possible={possible}
        picked={picked}
        onChange={setPicked}
        error={picked.length === 0 ? 'Choose at least one role, or remove the member.' : undefined}
      />
      <Refusal error={saving.error} />
      <div className="flex gap-3">
        <button
          type="button"
          className="btn btn-main"
          disabled={picked.length === 0 || saving.isPending}
          onClick={() => saving.mutate()}
        >
          Save
        </button>
        <button type="button" className="btn btn-quiet" onClick={onClose}>
          Cancel
        </button>
      </div>
    </Dialog>
  );
}

export function RemoveDialog({ member, onClose, onDone }: DialogProps) {
  const removing = useMutation({
    mutationFn: () => removeMember(member.id),
    onSuccess: () => onDone(`${member.name} is not a member any more.`),
  });
  return (
    <Dialog title={`Remove ${member.name}?`} onClose={onClose}>
      <p>
        Their sessions here end at once. What they uploaded, decided and noted stays under their name. To come
        back they need a new invitation.
      </p>
      <Refusal error={removing.error} />
      <div className="flex gap-3">
        <button
          type="button"
          className="btn border-hull text-hull"
          disabled={removing.isPending}
          onClick={() => removing.mutate()}
        >
          Remove
        </button>
        <button type="button" className="btn btn-quiet" onClick={onClose}>
          Keep
        </button>
      </div>
    </Dialog>
  );
}
