import type { ReactNode } from 'react';
import { Dialog as AriaDialog, Heading, Modal, ModalOverlay } from 'react-aria-components';

interface Props {
  title: string;
  onClose: () => void;
  children: ReactNode;
  wide?: boolean;
}

/** A modal dialog: focus held inside, Escape and a click outside close it. */
export function Dialog({ title, onClose, children, wide = false }: Props) {
  return (
    <ModalOverlay
      isOpen
      isDismissable
      onOpenChange={(open) => !open && onClose()}
      className="fixed inset-0 z-50 grid place-items-center overflow-y-auto bg-ground/75 p-3"
    >
      <Modal className={`w-full border border-ink bg-sheet text-ink ${wide ? 'max-w-3xl' : 'max-w-lg'}`}>
        <AriaDialog className="grid gap-4 p-5 outline-none">
          <Heading slot="title" className="text-[17px] font-semibold">
            {title}
          </Heading>
          {children}
        </AriaDialog>
      </Modal>
    </ModalOverlay>
  );
}
