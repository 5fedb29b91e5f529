/** Which presentation of a report an address asks for. */

/** The one at the place that `?presentation=` names, or the first; undefined where nothing is measured. */
export function shownPresentation<T extends { position: number }>(
  presentations: readonly T[],
  search: URLSearchParams,
): T | undefined {
  const asked = Number(search.get('presentation') ?? 1);
  return presentations.find(({ position }) => position === asked) ?? presentations[0];
}
