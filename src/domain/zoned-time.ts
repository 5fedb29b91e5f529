/** Wall-clock times of a zone, as people type them, and moments. */

const parts = (zone: string) =>
  new Intl.DateTimeFormat('en-GB', {
    timeZone: zone,
    hourCycle: 'h23',
    year: 'numeric',
    month: '2-digit',
    day: '2-digit',
    hour: '2-digit',
    minute: '2-digit',
  });

/** 'YYYY-MM-DDTHH:mm' as the clock of the zone shows the moment: what an input of type datetime-local holds. */
export function clockIn(zone: string, moment: Date): string {
  const at = Object.fromEntries(
    parts(zone)
      .formatToParts(moment)
      .map(({ type, value }) => [type, value]),
  );
  return `${at.year.padStart(4, '0')}-${at.month}-${at.day}T${at.hour}:${at.minute}`;
}

/**
 * The moment at which the zone's clock shows 'YYYY-MM-DDTHH:mm'; the first of two when clocks go back. `null` for other
 * text, and for an hour that a change of clocks leaves out.
 */
export function momentIn(zone: string, clock: string): Date | null {
  if (!/^\d{4}-\d\d-\d\dT\d\d:\d\d$/.test(clock)) return null;
  const asUtc = Date.parse(`${clock}Z`);
  if (Number.isNaN(asUtc)) return null;
  // Offsets lie between -12 and +14 hours, on the quarter hour today: those in force around the time are tried.
  const offsets = [-24, 0, 24].map((hours) => {
    const near = new Date(asUtc + hours * 3_600_000);
    return Date.parse(`${clockIn(zone, near)}Z`) - Math.floor(near.getTime() / 60_000) * 60_000;
  });
  const candidates = offsets
    .map((offset) => new Date(asUtc - offset))
    .filter((moment) => clockIn(zone, moment) === clock)
    .sort((a, b) => a.getTime() - b.getTime());
  return candidates[0] ?? null;
}
