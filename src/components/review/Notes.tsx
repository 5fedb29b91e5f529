import { useState, type FormEvent } from 'react';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { submissionReportSchema, type SubmissionReport } from '@/domain/api/submissions.ts';
import { readTimeInFile, timeInFile, type FileClock } from '@/domain/file-clock.ts';
import { momentText } from './review-list.ts';

interface Props {
  id: string;
  initial: SubmissionReport['notes'];
  mayWrite: boolean;
  timeZone: string;
  /** By which times of the file are written. */
  clock: FileClock;
}

/** Against which a note's moment is always told with its day. */
const longAgo = new Date(0);

/** Notes that both sides read, anchored to a time of the programme where one is given. */
export default function Notes({ id, initial, mayWrite, timeZone, clock }: Props) {
  const [notes, setNotes] = useState(initial);
  const [text, setText] = useState('');
  const [at, setAt] = useState('');
  const [trouble, setTrouble] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  const read = async () =>
    setNotes((await api.get(`/api/v1/submissions/${id}`, submissionReportSchema)).notes);
  useLiveEvents((event) => {
    // Another's note that cannot be read now is read with the next event or the next visit.
    if (event.kind === 'again' || (event.kind === 'submission' && event.id === id))
      void read().catch(() => undefined);
  });
  const send = async (event: FormEvent) => {
    event.preventDefault();
    const time = at.trim() === '' ? null : readTimeInFile(clock, at);
    if (time && 'fault' in time) {
      setTrouble(`${time.fault} Or leave the time empty. Your note is kept.`);
      return;
    }
    const atSeconds = time?.seconds ?? null;
    setBusy(true);
    setTrouble(null);
    try {
      await api.send('POST', `/api/v1/submissions/${id}/notes`, { text, atSeconds });
      setText('');
      setAt('');
      await read();
    } catch (error) {
      setTrouble(`${error instanceof Error ? error.message : String(error)} Your note is kept here.`);
    } finally {
      setBusy(false);
    }
  };
  return (
    <section className="sheet grid gap-3 p-4">
      <h2 className="text-[13px] font-semibold">Notes</h2>
      {notes.length === 0 && (
        <p className="text-muted">No notes. What is written here is read by both sides.</p>
      )}
      <ol className="grid gap-3">
        {notes.map((note) => (
          <li key={note.id} className="grid gap-0.5 border-b border-hairline pb-2 last:border-0">
            <p className="text-[12.5px] text-muted">
              {note.author.name}, {note.organisationName}, {momentText(note.createdAt, timeZone, longAgo)}
            </p>
            <p className="break-words whitespace-pre-line">
              {note.atSeconds !== null && (
                <span className="num mr-2 text-teal">{timeInFile(clock, note.atSeconds)}</span>
              )}
              {note.text}
            </p>
          </li>
        ))}
      </ol>
      {mayWrite && (
        <form className="grid gap-2" onSubmit={(event) => void send(event)}>
          <label className="grid gap-1">
            <span className="text-[13px] font-medium">Note</span>
            <textarea
              className="field"
              rows={2}
              required
              maxLength={4000}
              value={text}
              onChange={(event) => setText(event.target.value)}
            />
          </label>
          <label className="grid gap-1">
            <span className="text-[13px] font-medium">
              At, in the file ({clock.rate ? 'timecode' : 'hh:mm:ss.mmm'}), if anywhere
            </span>
            <input
              className="field num max-w-40"
              value={at}
              onChange={(event) => setAt(event.target.value)}
              placeholder={timeInFile(clock, 0)}
            />
          </label>
          {trouble && <Notice tone="refused">{trouble}</Notice>}
          <button type="submit" className="btn btn-quiet justify-self-start" disabled={busy}>
            {busy ? 'Adding…' : 'Add the note'}
          </button>
        </form>
      )}
    </section>
  );
}
