import { useMutation } from '@tanstack/react-query';
import { useState, type ReactNode } from 'react';
import { Dialog, Heading, Modal, ModalOverlay } from 'react-aria-components';
import type { Role } from '@/domain/vocabulary.ts';
import { gravestButton, mainButton, plainButton } from './look.ts';
import { removeMember, setRoles, type Member } from './member-calls.ts';
import { RoleTicks } from './RoleTicks.tsx';

interface FrameProps {
  title: string;
  onClose(): void;
  children: ReactNode;
}

function Frame({ title, onClose, children }: FrameProps) {
  return (
    <ModalOverlay
      isOpen
      isDismissable
      onOpenChange={(open) => !open && onClose()}
      className="fixed inset-0 z-50 grid place-items-center bg-ink/40 p-4"
    >
      <Modal className="w-full max-w-md border border-hairline bg-sheet p-6 text-ink">
        <Dialog className="grid gap-4 outline-none">
          <Heading slot="title" className="text-lg font-semibold">
            {title}
          </Heading>
          {children}
        </Dialog>
      </Modal>
    </ModalOverlay>
  );
}

const Refusal = ({ error }: { error: Error | null }) =>
  error && (
    <p role="alert" className="text-sm text-hull">
      {error.message}
    </p>
  );

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
    <Frame title={`Roles of ${member.name}`} onClose={onClose}>
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
          className={mainButton}
          disabled={picked.length === 0 || saving.isPending}
          onClick={() => saving.mutate()}
        >
          Save
        </button>
        <button type="button" className={`${plainButton} h-9`} onClick={onClose}>
          Cancel
        </button>
      </div>
    </Frame>
  );
}

export function RemoveDialog({ member, onClose, onDone }: DialogProps) {
  const removing = useMutation({
    mutationFn: () => removeMember(member.id),
    onSuccess: () => onDone(`${member.name} is not a member any more.`),
  });
  return (
    <Frame title={`Remove ${member.name}?`} onClose={onClose}>
      <p>
        Their sessions here end at once. What they uploaded, decided and noted stays under their name. To come
        back they need a new invitation.
      </p>
      <Refusal error={removing.error} />
      <div className="flex gap-3">
        <button
          type="button"
          className={gravestButton}
          disabled={removing.isPending}
          onClick={() => removing.mutate()}
        >
          Remove
        </button>
        <button type="button" className={`${plainButton} h-9`} onClick={onClose}>
          Keep
        </button>
      </div>
    </Frame>
  );
}
