import { useEffect, useRef, useState } from 'react';

interface Props {
  onFiles: (files: File[]) => void;
  /** Low, once there are files. */
  low: boolean;
}

/** Where files are dropped: a recess cut into the deck, which holds water while something hangs above it. The whole page takes the drop. */
export function DropSlip({ onFiles, low }: Props) {
  const [over, setOver] = useState(false);
  const input = useRef<HTMLInputElement>(null);
  const take = useRef(onFiles);
  useEffect(() => {
    take.current = onFiles;
  });
  useEffect(() => {
    const hold = (event: DragEvent) => {
      if (!event.dataTransfer?.types.includes('Files')) return;
      event.preventDefault();
      setOver(event.type === 'dragover');
      if (event.type === 'drop') take.current([...event.dataTransfer.files]);
    };
    const kinds = ['dragover', 'dragleave', 'drop'] as const;
    kinds.forEach((kind) => addEventListener(kind, hold));
    return () => kinds.forEach((kind) => removeEventListener(kind, hold));
  }, []);
  return (
    <div className="my-4 grid grid-cols-[minmax(8px,1fr)_minmax(0,720px)_minmax(8px,1fr)]">
      <div className="border-t border-ink" />
      <div
        className={`grid justify-items-center gap-3 border-x border-b border-ink px-4 text-center ${low ? 'py-2.5 sm:flex sm:flex-wrap sm:items-center sm:justify-center' : 'py-9'} ${over ? 'bg-water' : ''}`}
      >
        <p className={low ? '' : 'text-[16px]'}>
          {low ? 'Drop more anywhere, or' : 'Drop masters anywhere on this page, or'}
        </p>
        <button
          type="button"
          className={low ? 'btn btn-quiet' : 'btn btn-main'}
          onClick={() => input.current?.click()}
        >
          Choose files
        </button>
        <input
          ref={input}
          type="file"
          multiple
          className="sr-only"
          aria-label="Files to measure"
          tabIndex={-1}
          onChange={(event) => {
            onFiles([...(event.target.files ?? [])]);
            event.target.value = '';
          }}
        />
        {!low && (
          <p className="max-w-xl text-[12.5px] text-muted">
            WAV, RF64, BW64 and AIFF of any length; FLAC, MP3, AAC and Ogg as far as this browser decodes them
          </p>
        )}
      </div>
      <div className="border-t border-ink" />
    </div>
  );
}
