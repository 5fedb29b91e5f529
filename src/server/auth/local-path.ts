/** Where to go after signing in: only ever a path of this site, whatever the address asks for. */
const base = 'http://here.invalid';

/** The path with its query when it stays on this site and is not the sign-in itself; else `null`. */
export function localPath(asked: string | null | undefined): string | null {
  if (!asked || !asked.startsWith('/') || asked.length > 2000 || /[\\\u0000-\u0020\u007f]/.test(asked))
    return null;
  if (!URL.canParse(asked, base)) return null;
  const url = new URL(asked, base);
  if (url.origin !== base || /^\/(sign-in|sign-out|api)(\/|$)/.test(url.pathname)) return null;
  // A path of '//elsewhere' would be read as another host.
  return url.pathname.startsWith('//') ? null : url.pathname + url.search + url.hash;
}
