import { Dialog } from '@/components/look/Dialog.tsx';

const moving = [
  ['↑ ↓', 'move by row'],
  ['space', 'pick the row'],
  ['shift ↑ ↓', 'pick on from here'],
  ['enter', 'open the report'],
  ['/', 'find'],
];
const deciding = [
  ['a', 'approve the row in focus'],
  ['r', 'reject it, with a reason'],
  ['w', 'waive what fails, with reasons'],
];

/** The keys of the queue. */
export function KeysDialog({ mayDecide, onClose }: { mayDecide: boolean; onClose: () => void }) {
  return (
    <Dialog title="Keys" onClose={onClose}>
      <dl className="grid grid-cols-[auto_1fr] gap-x-6 gap-y-2">
        {[...moving, ...(mayDecide ? deciding : [])].map(([key, what]) => (
          <div key={key} className="contents">
            <dt>
              <kbd>{key}</kbd>
            </dt>
            <dd>{what}</dd>
          </div>
        ))}
      </dl>
      <div className="flex justify-end">
        <button type="button" className="btn btn-quiet" onClick={onClose}>
          Close
        </button>
      </div>
    </Dialog>
  );
}
