import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  abortMultipart,
  createMultipart,
  deleteObject,
  getObject,
  headObject,
  multipartStands,
  ObjectMissing,
  objectSource,
  presignedGet,
  putObject,
  StorageTrouble,
} from '../../../src/server/storage/storage.ts';
import { openServiceWorld } from '../service-world.ts';
import { gateBefore } from '../storage-gate.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let gate: Awaited<ReturnType<typeof gateBefore>>;
beforeAll(async () => {
  gate = await gateBefore(process.env.TEST_S3_ENDPOINT);
  world = await openServiceWorld(2, { S3_ENDPOINT: gate.url });
});
afterAll(async () => {
  await world.close();
  await gate.close();
});

const bytes = new Uint8Array(100_000).map((_, i) => i % 251);

describe('the store', () => {
  it('makes its bucket, keeps an object, and gives its size, its ranges and the whole', async () => {
    await putObject('a/b', bytes);
    expect(await headObject('a/b')).toEqual({ byteSize: bytes.length });
    expect(Buffer.compare(await getObject('a/b'), bytes)).toBe(0);
    const range = await objectSource('a/b', bytes.length).read(99_000, 5_000);
    expect(Buffer.compare(range, bytes.subarray(99_000))).toBe(0);
  });

  it('tells an object that is not there from storage that is away', async () => {
    expect(await headObject('no/such')).toBeNull();
    await expect(getObject('no/such')).rejects.toBeInstanceOf(ObjectMissing);
    await expect(objectSource('no/such', 10).read(0, 10)).rejects.toBeInstanceOf(ObjectMissing);
    gate.cut();
    await expect(headObject('a/b')).rejects.toBeInstanceOf(StorageTrouble);
    await expect(getObject('a/b')).rejects.toBeInstanceOf(StorageTrouble);
    gate.mend();
    expect(await headObject('a/b')).toEqual({ byteSize: bytes.length });
  });

  it('calls it trouble when an object has grown shorter than it was said to be', async () => {
    await expect(objectSource('a/b', bytes.length + 5).read(0, 200_000)).rejects.toBeInstanceOf(
      StorageTrouble,
    );
  });

  it('takes a store that refuses to drop or to list an upload as it is', async () => {
    const upload = await createMultipart('c/d');
    // s3rver answers both with 405 MethodNotAllowed.
    expect(await multipartStands('c/d', upload)).toBe('unknown');
    await abortMultipart('c/d', upload);
  });

  it('gives an address that plays an original under its own name, and never as a page', async () => {
    await putObject('e/f', bytes);
    const wav = await fetch(await presignedGet('e/f', 'Small Gales "2.11" ü.wav'));
    expect(wav.status).toBe(200);
    expect(wav.headers.get('content-type')).toBe('audio/wav');
    expect(wav.headers.get('content-disposition')).toBe(
      "inline; filename*=UTF-8''Small%20Gales%20%222.11%22%20%C3%BC.wav",
    );
    const page = await fetch(await presignedGet('e/f', 'evil.html'));
    expect(page.headers.get('content-type')).toBe('application/octet-stream');
    expect(page.headers.get('content-disposition')).toMatch(/^attachment/);
    await Promise.all([wav.arrayBuffer(), page.arrayBuffer()]);
  });

  it('removes an object, and one that is not there as well', async () => {
    await putObject('g', bytes);
    await deleteObject('g');
    await deleteObject('g');
    expect(await headObject('g')).toBeNull();
  });
});
