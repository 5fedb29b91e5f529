// Plain forms: the named fields as text, and nothing else.
/** Fields of a form body; what is missing, a file, or too long to be meant is ''. A body that is no form gives ''s. */
export async function textFields<K extends string>(
  request: Request,
  names: readonly K[],
): Promise<Record<K, string>> {
  const type = request.headers.get('content-type') ?? '';
  const isForm = /^(application\/x-www-form-urlencoded|multipart\/form-data)/i.test(type);
  const form = isForm ? await request.formData() : new FormData();
  const entries = names.map((name) => {
    const value = form.get(name);
    return [name, typeof value === 'string' && value.length <= 4000 ? value : ''];
  });
  return Object.fromEntries(entries);
}

/** Sends the browser on with a GET, with cookies as ready `Set-Cookie` lines. */
export function redirectWith(location: string, setCookies: readonly string[]): Response {
  const headers = new Headers({ location });
  for (const line of setCookies) headers.append('set-cookie', line);
  return new Response(null, { status: 303, headers });
}
