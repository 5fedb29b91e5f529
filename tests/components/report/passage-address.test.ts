import { describe, expect, it } from 'vitest';
import { passageAddress } from '../../../src/components/report/passage-address.ts';

describe('the address of a stretch', () => {
  it('shows what surrounds it, and keeps the rest of the address', () => {
    const address = passageAddress('?channel=b&t=1.00-2.00', { atSeconds: 62.5, lengthSeconds: 2 });
    expect(Object.fromEntries(new URLSearchParams(address))).toEqual({ channel: 'b', t: '57.50-69.50' });
  });

  it('begins no earlier than the programme', () => {
    expect(passageAddress('', { atSeconds: 1, lengthSeconds: 0 })).toBe('?t=0.00-6.00');
  });
});
