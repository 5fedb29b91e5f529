import { useEffect, useState } from 'react';
import type { Density } from './DataTable.tsx';

const kept = 'plimsoll-density';

/** How close the rows stand: a habit of this browser, not a part of the view, so it is not in the address. */
export function useDensity(): [Density, () => void] {
  const [density, setDensity] = useState<Density>('dense');
  useEffect(() => {
    try {
      if (localStorage.getItem(kept) === 'comfortable') setDensity('comfortable');
    } catch {
      // A browser that keeps nothing shows rows as everybody first sees them.
    }
  }, []);
  const change = () => {
    const next = density === 'dense' ? 'comfortable' : 'dense';
    setDensity(next);
    try {
      localStorage.setItem(kept, next);
    } catch {
      // Holds for this page then.
    }
  };
  return [density, change];
}
