import type { ReactNode } from 'react';

/** A sentence that wants to be noticed: what went wrong, what is kept, what to do; or that something was done. */
export function Notice({ tone = 'told', children }: { tone?: 'told' | 'refused'; children: ReactNode }) {
  return (
    <div
      role={tone === 'refused' ? 'alert' : 'status'}
      className={`border-l-[3px] px-3 py-2 ${tone === 'refused' ? 'border-hull bg-hull-wash' : 'border-teal bg-pick'}`}
    >
      {children}
    </div>
  );
}
