import { useEffect, useRef, useState, type ReactNode } from 'react';

interface Choice {
  name: string;
  label: string;
  options: { value: string; label: string }[];
}

interface Props {
  params: URLSearchParams;
  change: (changes: Record<string, string | null>) => void;
  choices: Choice[];
  placeholder: string;
  /** Stands at the end of the bar on wide windows. */
  children?: ReactNode;
}

const typingPauseMilliseconds = 250;

/** Text and choices that narrow a list; all of them live in the address. `/` goes to the text. */
export function FilterBar({ params, change, choices, placeholder, children }: Props) {
  const [text, setText] = useState(params.get('q') ?? '');
  const input = useRef<HTMLInputElement>(null);
  useEffect(() => {
    const pause = setTimeout(() => {
      if (text !== (new URLSearchParams(location.search).get('q') ?? '')) change({ q: text });
    }, typingPauseMilliseconds);
    return () => clearTimeout(pause);
  });
  useEffect(() => {
    const slash = (event: KeyboardEvent) => {
      const inField =
        event.target instanceof Element && event.target.closest('input, select, textarea, [role="dialog"]');
      if (event.key !== '/' || inField) return;
      event.preventDefault();
      input.current?.focus();
    };
    addEventListener('keydown', slash);
    return () => removeEventListener('keydown', slash);
  }, []);
  const narrowed = params.get('q') || choices.some((choice) => params.get(choice.name));
  return (
    <form
      role="search"
      className="my-3 flex flex-wrap items-center gap-2 max-sm:grid max-sm:grid-cols-2"
      onSubmit={(event) => event.preventDefault()}
    >
      <input
        ref={input}
        type="search"
        aria-label="Find"
        className="field max-sm:col-span-2 sm:w-60!"
        placeholder={placeholder}
        value={text}
        onChange={(event) => setText(event.target.value)}
      />
      {choices.map((choice) => (
        <label
          key={choice.name}
          className="field flex w-auto! min-w-0 items-center gap-1.5 border-hairline! py-0! focus-within:border-teal!"
        >
          <span className="font-semibold">{choice.label}</span>
          <select
            className="min-h-[30px] max-w-40 min-w-0 flex-1 bg-sheet text-ink"
            value={params.get(choice.name) ?? ''}
            onChange={(event) => change({ [choice.name]: event.target.value })}
          >
            <option value="">any</option>
            {choice.options.map((option) => (
              <option key={option.value} value={option.value}>
                {option.label}
              </option>
            ))}
          </select>
        </label>
      ))}
      {narrowed && (
        <button
          type="button"
          className="text-teal underline underline-offset-4"
          onClick={() => {
            setText('');
            change(Object.fromEntries([['q', null], ...choices.map((choice) => [choice.name, null])]));
          }}
        >
          Clear
        </button>
      )}
      <span className="ml-auto hidden text-[12.5px] text-muted lg:inline">
        {children ?? (
          <>
            <kbd>↑</kbd> <kbd>↓</kbd> move · <kbd>space</kbd> pick · <kbd>enter</kbd> open · <kbd>/</kbd> find
          </>
        )}
      </span>
    </form>
  );
}
