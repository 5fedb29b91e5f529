// @vitest-environment jsdom
import { afterEach, describe, expect, it, vi } from 'vitest';
import { z } from 'zod';
import { api, ApiProblem } from '@/components/live/api.ts';

const answering = (status: number, body: string) =>
  vi.stubGlobal(
    'fetch',
    vi.fn(async () => new Response(body, { status })),
  );
afterEach(() => vi.unstubAllGlobals());
const schema = z.object({ id: z.string() });

describe('asking the API', () => {
  it('gives only what the schema knows', async () => {
    answering(200, '{"id":"a","more":1}');
    expect(await api.get('/api/v1/x', schema)).toEqual({ id: 'a' });
  });

  it('refuses an answer of another shape instead of passing it on', async () => {
    answering(200, '{"id":7}');
    await expect(api.send('POST', '/api/v1/x', {}, schema)).rejects.toBeInstanceOf(z.ZodError);
  });

  it('carries the sentence, the code and the fields of a refusal', async () => {
    answering(409, '{"error":{"code":"conflict","message":"Taken already.","fields":{"name":"In use."}}}');
    await expect(api.send('POST', '/api/v1/x', {})).rejects.toMatchObject({
      status: 409,
      code: 'conflict',
      message: 'Taken already.',
      fields: { name: 'In use.' },
    });
  });

  it('makes a sentence where the answer is no refusal of ours', async () => {
    answering(502, '<html>Bad gateway</html>');
    await expect(api.get('/api/v1/x', schema)).rejects.toThrow(
      'The server answered 502 and gave no reason. Try again.',
    );
  });

  it('tells a lost connection from a refusal', async () => {
    vi.stubGlobal(
      'fetch',
      vi.fn(async () => {
        throw new TypeError('Failed to fetch');
      }),
    );
    const problem = await api.get('/api/v1/x', schema).catch((error: unknown) => error);
    expect(problem).toBeInstanceOf(ApiProblem);
    expect(problem).toMatchObject({ status: 0, code: 'offline' });
  });
});
