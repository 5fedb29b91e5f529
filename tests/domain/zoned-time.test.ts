import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { clockIn, momentIn } from '../../src/domain/zoned-time.ts';

describe('a clock of a zone', () => {
  it.each([
    // Offsets by the IANA time zone database: London +0/+1, Kathmandu +5:45, Auckland +13 in January.
    ['Europe/London', '2026-12-01T09:30', '2026-12-01T09:30:00.000Z'],
    ['Europe/London', '2026-07-01T09:30', '2026-07-01T08:30:00.000Z'],
    ['Asia/Kathmandu', '2026-07-01T00:00', '2026-06-30T18:15:00.000Z'],
    ['Pacific/Auckland', '2026-01-10T12:00', '2026-01-09T23:00:00.000Z'],
    // Clocks go back at 02:00 summer time: 01:30 comes twice, the first is in summer time.
    ['Europe/London', '2026-10-25T01:30', '2026-10-25T00:30:00.000Z'],
  ])('in %s that shows %s', (zone, clock, moment) => {
    expect(momentIn(zone, clock)?.toISOString()).toBe(moment);
  });

  it('never shows an hour that the change to summer time leaves out, nor what is no time', () => {
    expect(momentIn('Europe/London', '2026-03-29T01:30')).toBeNull();
    expect(momentIn('Europe/London', '2026-13-01T01:30')).toBeNull();
    expect(momentIn('Europe/London', 'tomorrow')).toBeNull();
  });

  it('reads back what it shows, but for the hour that comes twice', () => {
    const minute = fc.integer({ min: Date.UTC(2026, 0) / 60_000, max: Date.UTC(2028, 0) / 60_000 });
    fc.assert(
      fc.property(
        minute,
        fc.constantFrom('Europe/London', 'America/New_York', 'Asia/Kathmandu'),
        (m, zone) => {
          const moment = new Date(m * 60_000);
          const back = momentIn(zone, clockIn(zone, moment));
          expect([0, 60]).toContain((moment.getTime() - (back?.getTime() ?? 0)) / 60_000);
        },
      ),
    );
  });
});
