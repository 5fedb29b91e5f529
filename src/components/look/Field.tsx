import { useId, type ReactNode } from 'react';

interface Props {
  label: string;
  hint?: string;
  error?: string;
  /** Renders the input with the ids that tie it to label, hint and error. */
  children: (ids: { id: string; 'aria-describedby'?: string; 'aria-invalid'?: true }) => ReactNode;
}

/** A label, an input, and beneath it a hint or what is wrong. */
export function Field({ label, hint, error, children }: Props) {
  const id = useId();
  const described = [hint && `${id}-hint`, error && `${id}-error`].filter(Boolean).join(' ') || undefined;
  return (
    <div className="grid content-start gap-1">
      <label htmlFor={id} className="text-[13px] font-medium">
        {label}
      </label>
      {children({ id, 'aria-describedby': described, 'aria-invalid': error ? true : undefined })}
      {hint && (
        <p id={`${id}-hint`} className="text-[13px] text-muted">
          {hint}
        </p>
      )}
      {error && (
        <p id={`${id}-error`} className="text-[13px] text-hull">
          {error}
        </p>
      )}
    </div>
  );
}
