/** Signing in and out by plain forms: the server speaks to Auth.js for the browser, which then needs no script. */
import { Auth, type AuthConfig } from '@auth/core';
import { z } from 'zod';
import type { Refusal, RefusalCode } from '../refusals.ts';

const csrfSchema = z.object({ csrfToken: z.string().min(1) });
const redirectSchema = z.object({ url: z.string() });

/** `name=value` pairs to send back for the `Set-Cookie` lines of an answer. */
const pairsOf = (setCookies: readonly string[]) => setCookies.map((line) => line.split(';', 1)[0]).join('; ');

async function post(
  config: AuthConfig,
  origin: string,
  action: string,
  cookies: string,
  fields: Record<string, string>,
): Promise<{ setCookies: string[]; url: URL }> {
  const csrf = await Auth(new Request(`${origin}/api/auth/csrf`), config);
  const { csrfToken } = csrfSchema.parse(await csrf.json());
  const csrfCookies = csrf.headers.getSetCookie();
  const answer = await Auth(
    new Request(`${origin}/api/auth/${action}`, {
      method: 'POST',
      headers: {
        'content-type': 'application/x-www-form-urlencoded',
        'x-auth-return-redirect': '1',
        origin,
        cookie: [cookies, pairsOf(csrfCookies)].filter(Boolean).join('; '),
      },
      body: new URLSearchParams({ ...fields, csrfToken, callbackUrl: origin }),
    }),
    config,
  );
  const { url } = redirectSchema.parse(await answer.json());
  return { setCookies: [...csrfCookies, ...answer.headers.getSetCookie()], url: new URL(url, origin) };
}

const words = {
  unauthenticated: 'This e-mail address and password do not belong together.',
  too_many: 'Too many tries. Wait a quarter of an hour, or choose a new password.',
  forbidden: 'You are not a member of an organisation any more. Ask an administrator to invite you.',
  unavailable: 'Signing in does not work at the moment. Nothing is lost; try again in a minute.',
} as const satisfies Partial<Record<RefusalCode, string>>;
const codeSchema = z.enum(['unauthenticated', 'too_many', 'forbidden']);

/**
 * `Set-Cookie` lines of a new session, or why there is none: the refusals of `signIn`, and 'unavailable' for trouble of
 * ours. `origin` is the site's, as the browser sees it.
 */
export async function signInThrough(
  config: AuthConfig,
  origin: string,
  { email, password }: { email: string; password: string },
): Promise<{ setCookies: string[] } | { refusal: Refusal }> {
  const { setCookies, url } = await post(config, origin, 'callback/credentials', '', { email, password });
  const error = url.searchParams.get('error');
  if (error === null) return { setCookies };
  const told = codeSchema.safeParse(url.searchParams.get('code'));
  const code = error === 'CredentialsSignin' && told.success ? told.data : 'unavailable';
  return { refusal: { code, message: words[code] } };
}

/** Ends the session of these cookies; the lines clear them in the browser. */
export async function signOutThrough(config: AuthConfig, origin: string, cookies: string): Promise<string[]> {
  // An earlier CSRF cookie would stand before ours and not fit the token.
  const kept = cookies.split(/;\s*/).filter((pair) => !/csrf-token=/.test(pair));
  return (await post(config, origin, 'signout', kept.join('; '), {})).setCookies;
}
