import type { APIRoute } from 'astro';
import { json } from '@/pages/_endpoint.ts';
import { readHealth } from '@/server/services/health.ts';

export const GET: APIRoute = async () => {
  const health = await readHealth();
  return json(health, health.ok ? 200 : 503);
};
