import type { BenchSpec } from './bench-specs.ts';

interface Props {
  specs: readonly BenchSpec[];
  chosen: readonly BenchSpec[];
  onChoose: (ids: string[]) => void;
}

/** Which specs the table's verdict is against: at least one. */
export function AgainstPicker({ specs, chosen, onChoose }: Props) {
  const own = specs.filter(({ published }) => !published);
  const groups = [
    { title: 'Of the channels', members: own },
    { title: 'Of published documents', members: specs.filter(({ published }) => published) },
  ].filter(({ members }) => members.length > 0);
  const toggle = (id: string) => {
    const ids = specs.filter((spec) => chosen.includes(spec) !== (spec.id === id)).map((spec) => spec.id);
    if (ids.length > 0) onChoose(ids);
  };
  return (
    <details data-menu className="group relative min-w-0">
      <summary className="flex min-h-8 list-none items-baseline gap-2 rounded border border-hairline bg-sheet px-2.5 py-1">
        <span className="font-semibold whitespace-nowrap">Held against</span>
        <span className="min-w-0 truncate">
          {chosen[0]?.name}
          {chosen.length > 1 && <span className="text-muted"> and {chosen.length - 1} more</span>}
        </span>
        <span aria-hidden="true" className="text-muted group-open:rotate-180">
          ⌄
        </span>
      </summary>
      <div className="absolute left-0 z-20 mt-1 grid max-h-[60vh] w-[min(460px,calc(100vw-24px))] gap-4 overflow-y-auto border border-ink bg-sheet p-4">
        {groups.map(({ title, members }) => (
          <fieldset key={title} className="grid gap-2">
            <legend className="mb-1 text-[12.5px] text-muted">{title}</legend>
            {members.map((spec) => (
              <label key={spec.id} className="flex items-start gap-2.5">
                <input
                  type="checkbox"
                  className="mt-[3px] shrink-0"
                  checked={chosen.includes(spec)}
                  disabled={chosen.length === 1 && chosen[0] === spec}
                  onChange={() => toggle(spec.id)}
                />
                <span>
                  {spec.name}
                  <span className="block text-[12.5px] text-muted">
                    {[spec.by, spec.use].filter(Boolean).join('; ')}
                  </span>
                </span>
              </label>
            ))}
          </fieldset>
        ))}
      </div>
    </details>
  );
}
