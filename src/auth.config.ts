import Credentials from '@auth/core/providers/credentials';
import { CredentialsSignin } from '@auth/core/errors';
import { defineConfig } from 'auth-astro';
import { z } from 'zod';
import { keepTrouble, requestOrigin } from './server/auth/request-origin.ts';
import { config } from './server/config.ts';
import { sessionSeconds } from './server/db/sessions-repository.ts';
import { log } from './server/log.ts';
import type { MemberScope } from './server/scope.ts';
import { endSession, resumeSession, signIn } from './server/services/sign-in.ts';

const credentialsSchema = z.object({ email: z.string().max(320), password: z.string().max(1000) });
const claimsSchema = z.object({ sid: z.uuid(), sv: z.number().int() });

/** The code reaches the sign-in page in the answer's address. */
class Refused extends CredentialsSignin {
  constructor(code: string) {
    super(code);
    this.code = code;
  }
}

async function resume(sessionId: string, sessionVersion: number): Promise<MemberScope | null> {
  try {
    return await resumeSession(sessionId, sessionVersion);
  } catch (error) {
    keepTrouble(error);
    throw error;
  }
}

declare module '@auth/core/types' {
  interface User {
    sid?: string;
    sv?: number;
  }
  interface Session {
    scope: MemberScope;
  }
}
declare module '@auth/core/jwt' {
  interface JWT {
    sid?: string;
    sv?: number;
    scope?: MemberScope;
  }
}

// Getters: the configuration is read when the first request asks, not while the site is being built.
export default defineConfig({
  get secret() {
    return config().AUTH_SECRET;
  },
  get useSecureCookies() {
    return config().APP_ORIGIN.startsWith('https:');
  },
  trustHost: true,
  session: { strategy: 'jwt', maxAge: sessionSeconds },
  pages: { signIn: '/sign-in', error: '/sign-in', signOut: '/' },
  logger: {
    error(error) {
      // A wrong password and a cookie that means nothing are everyday events, not errors; middleware logs the rest of these.
      if (error instanceof CredentialsSignin || error.name === 'JWTSessionError') return;
      log.error({ err: error }, 'auth');
    },
    warn: (code) => log.debug({ code }, 'auth'),
    debug: () => undefined,
  },
  providers: [
    Credentials({
      credentials: { email: {}, password: {} },
      async authorize(input) {
        const parsed = credentialsSchema.safeParse(input);
        if (!parsed.success) throw new Refused('unauthenticated');
        const answer = await signIn(parsed.data.email, parsed.data.password, requestOrigin());
        if (!answer.ok) throw new Refused(answer.refusal.code);
        const { userId, name, email, sessionId, sessionVersion } = answer.value;
        return { id: userId, name, email, sid: sessionId, sv: sessionVersion };
      },
    }),
  ],
  callbacks: {
    async jwt({ token, user }) {
      if (user) return { sub: user.id, sid: user.sid, sv: user.sv };
      const claims = claimsSchema.safeParse(token);
      const scope = claims.success ? await resume(claims.data.sid, claims.data.sv) : null;
      // `null` tells Auth.js to drop the cookie: the session was ended from our side.
      return scope && { ...token, scope };
    },
    session({ session, token }) {
      if (!token.scope) throw new Error('A session without its scope');
      return { expires: session.expires, user: session.user, scope: token.scope };
    },
  },
  events: {
    async signOut(message) {
      if ('token' in message && message.token?.sid) await endSession(message.token.sid);
    },
  },
});
