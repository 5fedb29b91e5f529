import type { APIRoute } from 'astro';
import authConfig from 'auth:config';
import { signOutThrough } from '@/server/auth/through-auth.ts';

export const POST: APIRoute = async ({ request, url }) => {
  const lines = await signOutThrough(authConfig, url.origin, request.headers.get('cookie') ?? '');
  const headers = new Headers(lines.map((line) => ['set-cookie', line]));
  headers.set('location', '/');
  return new Response(null, { status: 303, headers });
};
