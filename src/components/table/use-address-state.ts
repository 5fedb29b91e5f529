import { useEffect, useState } from 'react';

/** The address's search parameters as state: any view can be sent to a colleague. Writing replaces, so Back leaves the screen. */
export function useAddressState(
  initial: string,
): [URLSearchParams, (changes: Record<string, string | null>) => void] {
  const [search, setSearch] = useState(initial);
  useEffect(() => {
    const back = () => setSearch(location.search);
    addEventListener('popstate', back);
    return () => removeEventListener('popstate', back);
  }, []);
  const change = (changes: Record<string, string | null>) => {
    const next = new URLSearchParams(location.search);
    for (const [name, value] of Object.entries(changes))
      if (value === null || value === '') next.delete(name);
      else next.set(name, value);
    const text = next.size > 0 ? `?${next}` : '';
    history.replaceState(null, '', location.pathname + text);
    setSearch(text);
  };
  return [new URLSearchParams(search), change];
}
