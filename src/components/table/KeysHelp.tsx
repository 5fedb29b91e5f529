import { useEffect, useState } from 'react';
import { Dialog } from '@/components/look/Dialog.tsx';

export type Keys = readonly (readonly [keys: string, does: string])[];

/** What the table kit's lists share. */
export const listKeys: Keys = [
  ['↑ ↓', 'move from row to row'],
  ['Home End', 'first row, last row'],
  ['Space', 'pick the row, or drop it'],
  ['Shift ↑ ↓', 'pick the rows passed over'],
  ['Enter', 'open the row'],
  ['/', 'find'],
  ['?', 'these keys'],
];

/** `?` shows the keys of the screen; so does the button. */
export function KeysHelp({ keys }: { keys: Keys }) {
  const [open, setOpen] = useState(false);
  useEffect(() => {
    const ask = (event: KeyboardEvent) => {
      const writing = event.target instanceof Element && event.target.closest('input, select, textarea');
      if (event.key === '?' && !writing) setOpen(true);
    };
    addEventListener('keydown', ask);
    return () => removeEventListener('keydown', ask);
  }, []);
  return (
    <>
      <button type="button" className="hover:text-ink" onClick={() => setOpen(true)}>
        <kbd>?</kbd> all keys
      </button>
      {open && (
        <Dialog title="Keys" onClose={() => setOpen(false)}>
          <dl className="grid grid-cols-[auto_1fr] items-baseline gap-x-6 gap-y-2">
            {keys.map(([key, does]) => (
              <div key={key} className="contents">
                <dt className="flex gap-1">
                  {key.split(' ').map((one) => (
                    <kbd key={one}>{one}</kbd>
                  ))}
                </dt>
                <dd>{does}</dd>
              </div>
            ))}
          </dl>
          <div className="flex justify-end">
            <button type="button" className="btn btn-quiet" onClick={() => setOpen(false)}>
              Close
            </button>
          </div>
        </Dialog>
      )}
    </>
  );
}
