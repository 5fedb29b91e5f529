import type { APIRoute } from 'astro';
import authConfig from 'auth:config';
import { redirectWith } from '@/pages/_form.ts';
import { signOutThrough } from '@/server/auth/through-auth.ts';

export const POST: APIRoute = async ({ request, url }) =>
  redirectWith('/', await signOutThrough(authConfig, url.origin, request.headers.get('cookie') ?? ''));
