import { speakers, type Speaker } from '@/engine/layouts.ts';
import type { Column } from './plan-form.ts';

interface Props {
  /** By audio channel; '' where the file names none. */
  trackNames: string[];
  columns: Column[];
  onChange: (columns: Column[]) => void;
}

const isSpeaker = (value: string): value is Speaker => (speakers as readonly string[]).includes(value);
const inWords = (speaker: Speaker) =>
  speaker === 'M' ? 'M (mono)' : speaker === 'unknown' ? 'weighs 1.0' : speaker;

/** Which loudspeaker each audio channel of the file feeds, in each presentation: a row per channel, a column per presentation. */
export function PatchGrid({ trackNames, columns, onChange }: Props) {
  const change = (at: number, column: Column) => onChange(columns.map((one, i) => (i === at ? column : one)));
  return (
    <div className="max-h-[46vh] overflow-auto border border-hairline">
      <table className="rows text-[13px]" aria-label="Audio channels and presentations">
        <thead className="sticky top-0 z-10 bg-sheet">
          <tr>
            <th scope="col" className="align-bottom!">
              Audio channel
            </th>
            {columns.map((column, at) => (
              <th key={at} scope="col" className="min-w-36 font-normal!">
                <span className="flex items-end gap-1">
                  <input
                    className="field"
                    aria-label={`Name of presentation ${at + 1}`}
                    value={column.name}
                    maxLength={60}
                    onChange={(event) => change(at, { ...column, name: event.target.value })}
                  />
                  {columns.length > 1 && (
                    <button
                      type="button"
                      className="btn btn-quiet px-2!"
                      aria-label={`Take away presentation ${column.name || at + 1}`}
                      onClick={() => onChange(columns.filter((_, i) => i !== at))}
                    >
                      <span aria-hidden="true">×</span>
                    </button>
                  )}
                </span>
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {trackNames.map((name, channel) => (
            <tr key={channel}>
              <th scope="row" className="border-b border-hairline! font-normal! text-ink!">
                <span className="num">{channel + 1}</span>
                {name && <span className="ml-2 text-muted">{name}</span>}
              </th>
              {columns.map((column, at) => (
                <td key={at} className={column.speakers[channel] ? 'bg-pick' : undefined}>
                  <select
                    className={`field border-transparent! bg-transparent! hover:border-muted! ${column.speakers[channel] ? 'font-semibold' : 'text-muted!'}`}
                    aria-label={`Audio channel ${channel + 1} in ${column.name || `presentation ${at + 1}`}`}
                    value={column.speakers[channel] ?? ''}
                    onChange={({ target: { value } }) =>
                      change(at, {
                        ...column,
                        speakers: column.speakers.map((was, i) =>
                          i === channel ? (isSpeaker(value) ? value : null) : was,
                        ),
                      })
                    }
                  >
                    <option value="">not in it</option>
                    {speakers.map((speaker) => (
                      <option key={speaker} value={speaker}>
                        {inWords(speaker)}
                      </option>
                    ))}
                  </select>
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
