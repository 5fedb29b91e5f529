import { createHash, randomBytes } from 'node:crypto';
import { S3Client, UploadPartCommand } from '@aws-sdk/client-s3';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  completeUploadResultSchema,
  createUploadsResultSchema,
  uploadListSchema,
  type Upload,
} from '../../../src/domain/api/deliverables.ts';
import { partSize } from '../../../src/domain/upload-plan.ts';
import { db } from '../../../src/server/db/connection.ts';
import { hasLiveJob } from '../../../src/server/queue/measuring-queue.ts';
import type { Answer } from '../../../src/server/refusals.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import {
  abortUpload,
  completeUpload,
  createUploads,
  listUploads,
  recordPart,
  signParts,
  type NewFile,
} from '../../../src/server/services/uploads.ts';
import { getObject, headObject } from '../../../src/server/storage/storage.ts';
import { makeAgreedChannel, makePerson, openServiceWorld } from '../service-world.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let engineer: MemberScope;
let colleagueOfAnother: MemberScope;
let distributor: MemberScope;
beforeAll(async () => {
  world = await openServiceWorld(1);
  engineer = await makePerson();
  colleagueOfAnother = await makePerson();
  distributor = await makePerson(['qc_operator'], 'distributor');
});
afterAll(() => world.close());

// Two whole parts and a rest.
const bytes = randomBytes(2 * 8 * 1024 ** 2 + 1000);
const sha256 = createHash('sha256').update(bytes).digest('hex');
let modified = 1_700_000_000_000;
const file = (given: Partial<NewFile> = {}): NewFile => ({
  fileName: 'tallow_104_mix51_v2.wav',
  byteSize: bytes.length,
  lastModifiedMs: (modified += 1000),
  details: {},
  ...given,
});

function value<T>(answer: Answer<T>): T {
  if (!answer.ok) throw new Error(`${answer.refusal.code}: ${answer.refusal.message}`);
  return answer.value;
}
const codeOf = (answer: Answer<unknown>) => (answer.ok ? 'ok' : answer.refusal.code);

async function begin(scope: MemberScope, given: NewFile): Promise<Upload> {
  const { items } = value(await createUploads(scope, [given]));
  if (!items[0].ok) throw new Error(items[0].error.message);
  return items[0].value;
}

/** What a browser does with one part: asks where, puts the bytes, tells the ETag. */
async function send(scope: MemberScope, upload: Upload, number: number, of = bytes): Promise<void> {
  const { items } = value(await signParts(scope, upload.deliverableId, [number]));
  const size = partSize(upload.byteSize, upload, number);
  const part = of.subarray((number - 1) * upload.partBytes, (number - 1) * upload.partBytes + size);
  const put = await fetch(items[0].url, { method: 'PUT', body: new Uint8Array(part) });
  expect(put.status).toBe(200);
  value(
    await recordPart(scope, upload.deliverableId, {
      number,
      etag: put.headers.get('etag') ?? '',
      byteSize: size,
    }),
  );
}

async function deliver(scope: MemberScope, given = file(), of = bytes) {
  const upload = await begin(scope, given);
  for (let number = 1; number <= upload.partCount; number++) await send(scope, upload, number, of);
  return value(
    await completeUpload(scope, upload.deliverableId, createHash('sha256').update(of).digest('hex')),
  );
}
/** A client that keeps to nobody's signature. */
const strayClient = () =>
  new S3Client({
    endpoint: process.env.S3_ENDPOINT,
    region: 'us-east-1',
    credentials: { accessKeyId: 'S3RVER', secretAccessKey: 'S3RVER' },
    forcePathStyle: true,
    requestChecksumCalculation: 'WHEN_REQUIRED',
  });
const row = (id: string) => db()('deliverables').where({ id }).first();

describe('uploading', () => {
  it('puts the bytes in storage, part by part, and hands the deliverable to measuring', async () => {
    const upload = await begin(engineer, file());
    expect(upload).toMatchObject({ partCount: 3, partsDone: [], resumed: false });
    for (const number of [3, 1, 2]) await send(engineer, upload, number);
    const arrival = value(await completeUpload(engineer, upload.deliverableId, sha256));
    expect(completeUploadResultSchema.parse(arrival)).toMatchObject({
      deliverable: { id: upload.deliverableId, state: 'waiting', fileName: upload.fileName },
      alreadyDelivered: null,
    });
    const stored = await row(upload.deliverableId);
    expect(stored).toMatchObject({ state: 'waiting', sha256_declared: sha256, uploaded_by: engineer.userId });
    expect(
      createHash('sha256')
        .update(await getObject(stored.storage_key))
        .digest('hex'),
    ).toBe(sha256);
    expect(await hasLiveJob(upload.deliverableId)).toBe(true);
    expect(await db()('audit_events').where({ subject_id: upload.deliverableId }).pluck('action')).toEqual([
      'deliverable.uploaded',
    ]);
  });

  it('answers each file of a request by itself, and says why one is not taken', async () => {
    const { items } = createUploadsResultSchema.parse(
      value(
        await createUploads(engineer, [
          file({ byteSize: 0 }),
          file(),
          file({ fileName: '.hidden' }),
          file({ byteSize: 65 * 1024 ** 3 }),
        ]),
      ),
    );
    expect(items.map((item) => item.ok)).toEqual([false, true, false, false]);
    expect(items.map((item) => item.id)).toEqual(['0', '1', '2', '3']);
    expect(items.map((item) => (item.ok ? '' : item.error.message))).toEqual([
      expect.stringMatching(/empty/),
      '',
      expect.stringMatching(/dot/),
      expect.stringMatching(/64 GiB/),
    ]);
  });

  it('goes on with a broken-off upload of the same file, and only what is missing is sent', async () => {
    const same = file();
    const first = await begin(engineer, same);
    await send(engineer, first, 2);
    const again = await begin(engineer, same);
    expect(again).toMatchObject({ deliverableId: first.deliverableId, resumed: true, partsDone: [2] });
    for (const number of [1, 3]) await send(engineer, again, number);
    value(await completeUpload(engineer, again.deliverableId, sha256));
    expect((await row(again.deliverableId)).state).toBe('waiting');
  });

  it('lists what may go on, and no longer what arrived or was given up', async () => {
    const person = await makePerson();
    const open = await begin(person, file());
    const given = await begin(person, file());
    value(await abortUpload(person, given.deliverableId));
    await deliver(person);
    const { items } = uploadListSchema.parse(value(await listUploads(person)));
    expect(items.map((item) => item.deliverableId)).toEqual([open.deliverableId]);
  });

  it('gives two files of one request that look the same an upload each, and resumes both', async () => {
    const twin = file();
    const ids = async () =>
      value(await createUploads(engineer, [twin, twin])).items.map(
        (item) => item.ok && item.value.deliverableId,
      );
    const first = await ids();
    expect(new Set(first).size).toBe(2);
    expect((await ids()).sort()).toEqual(first.sort());
  });

  it('does not take another size, another time of change, or another organisation for the same file', async () => {
    const same = file();
    const first = await begin(engineer, same);
    const others = [
      await begin(engineer, { ...same, byteSize: same.byteSize + 1 }),
      await begin(engineer, { ...same, lastModifiedMs: same.lastModifiedMs + 1 }),
      await begin(colleagueOfAnother, same),
    ];
    for (const other of others) {
      expect(other.resumed).toBe(false);
      expect(other.deliverableId).not.toBe(first.deliverableId);
    }
  });

  it('tells a file that was delivered before, within the organisation only', async () => {
    const person = await makePerson();
    const first = await deliver(person, file({ fileName: 'first.wav' }));
    const second = await deliver(person, file({ fileName: 'second.wav' }));
    expect(first.alreadyDelivered).toBeNull();
    expect(second.alreadyDelivered).toMatchObject({ id: first.deliverable.id, fileName: 'first.wav' });
    expect((await deliver(await makePerson())).alreadyDelivered).toBeNull();
  });

  it('refuses to complete while parts are missing, and says which', async () => {
    const upload = await begin(engineer, file());
    await send(engineer, upload, 2);
    const answer = await completeUpload(engineer, upload.deliverableId, sha256);
    expect(answer).toMatchObject({
      ok: false,
      refusal: { code: 'conflict', message: expect.stringMatching(/2 of 3 parts .*\(1, 3\)/) },
    });
    expect((await row(upload.deliverableId)).state).toBe('uploading');
  });

  it('refuses a part of the wrong size or beyond the last', async () => {
    const upload = await begin(engineer, file());
    const id = upload.deliverableId;
    expect(codeOf(await recordPart(engineer, id, { number: 1, etag: '"x"', byteSize: 999 }))).toBe(
      'bad_input',
    );
    expect(codeOf(await recordPart(engineer, id, { number: 4, etag: '"x"', byteSize: 1000 }))).toBe(
      'bad_input',
    );
    expect(codeOf(await signParts(engineer, id, [1, 4]))).toBe('bad_input');
  });

  // AWS, "Authenticating Requests: Using Query Parameters (AWS Signature Version 4)": a signed header binds its value.
  // s3rver does not check it, so only the address can be looked at here.
  it('signs the length of each part, so that storage refuses another', async () => {
    const upload = await begin(engineer, file());
    const { items } = value(await signParts(engineer, upload.deliverableId, [1, 3]));
    for (const { url } of items)
      expect(new URL(url).searchParams.get('X-Amz-SignedHeaders')?.split(';')).toContain('content-length');
    expect(new URL(items[0].url).origin).toBe(process.env.S3_PUBLIC_ENDPOINT);
  });

  it('refuses when fewer bytes lie in storage than the file has, keeps none of them, and takes the file anew', async () => {
    const same = file({ byteSize: 500 });
    const upload = await begin(engineer, same);
    const { storage_upload_id: UploadId } = await db()('uploads')
      .where({ deliverable_id: upload.deliverableId })
      .first();
    const { storage_key: Key } = await row(upload.deliverableId);
    const { ETag: etag = '' } = await strayClient().send(
      new UploadPartCommand({
        Bucket: world.environment.S3_BUCKET,
        Key,
        UploadId,
        PartNumber: 1,
        Body: new Uint8Array(400),
      }),
    );
    value(await recordPart(engineer, upload.deliverableId, { number: 1, etag, byteSize: 500 }));
    expect(await completeUpload(engineer, upload.deliverableId, sha256)).toMatchObject({
      ok: false,
      refusal: {
        code: 'conflict',
        message: expect.stringMatching(/400 bytes arrived where the file has 500/),
      },
    });
    expect((await row(upload.deliverableId)).discarded_at).not.toBeNull();
    expect(await headObject(Key)).toBeNull();
    expect((await begin(engineer, same)).resumed).toBe(false);
  });

  it('completes once, however often and at once it is asked', async () => {
    const upload = await begin(engineer, file());
    for (const number of [1, 2, 3]) await send(engineer, upload, number);
    const answers = await Promise.all(
      [1, 2, 3].map(() => completeUpload(engineer, upload.deliverableId, sha256)),
    );
    answers.push(await completeUpload(engineer, upload.deliverableId, sha256));
    expect(answers.map(codeOf)).toEqual(['ok', 'ok', 'ok', 'ok']);
    expect(
      await db()('audit_events').where({ subject_id: upload.deliverableId, action: 'deliverable.uploaded' }),
    ).toHaveLength(1);
  });

  it('gives an upload up: the deliverable is discarded, and nothing more is signed', async () => {
    const upload = await begin(engineer, file());
    value(await abortUpload(engineer, upload.deliverableId));
    value(await abortUpload(engineer, upload.deliverableId));
    expect((await row(upload.deliverableId)).discarded_at).not.toBeNull();
    expect(codeOf(await signParts(engineer, upload.deliverableId, [1]))).toBe('gone');
    expect(codeOf(await completeUpload(engineer, upload.deliverableId, sha256))).toBe('gone');
  });

  it('does not give up what has arrived', async () => {
    const deliverableId = (await deliver(engineer)).deliverable.id;
    expect(codeOf(await abortUpload(engineer, deliverableId))).toBe('conflict');
    expect(codeOf(await signParts(engineer, deliverableId, [1]))).toBe('conflict');
  });
});

describe('who may upload', () => {
  it('shows a foreign organisation nothing of an upload', async () => {
    const { deliverableId } = await begin(engineer, file());
    const asStranger = [
      signParts(colleagueOfAnother, deliverableId, [1]),
      recordPart(colleagueOfAnother, deliverableId, { number: 1, etag: '"x"', byteSize: 10 }),
      completeUpload(colleagueOfAnother, deliverableId, sha256),
      abortUpload(colleagueOfAnother, deliverableId),
    ];
    expect((await Promise.all<Answer<unknown>>(asStranger)).map(codeOf)).toEqual(Array(4).fill('not_found'));
    expect(
      value(await listUploads(colleagueOfAnother)).items.map((item) => item.deliverableId),
    ).not.toContain(deliverableId);
  });

  it('refuses whoever is no mix engineer of a supplier', async () => {
    const { deliverableId } = await begin(engineer, file());
    const administrator: MemberScope = { ...engineer, roles: ['administrator'] };
    for (const scope of [administrator, distributor]) {
      const answers: Answer<unknown>[] = [
        await createUploads(scope, [file()]),
        await listUploads(scope),
        await signParts(scope, deliverableId, [1]),
        await completeUpload(scope, deliverableId, sha256),
        await abortUpload(scope, deliverableId),
      ];
      expect(answers.map(codeOf)).toEqual(Array(5).fill('forbidden'));
    }
  });
});

describe('details of a deliverable', () => {
  it('makes programme and episode where they are new, and finds them in any case of letters', async () => {
    const details = {
      programmeTitle: 'The Tallow Road',
      episodeLabel: '1.04',
      versionLabel: 'v2',
      contentKind: 'trailer' as const,
    };
    const first = await begin(engineer, file({ details }));
    const second = await begin(
      engineer,
      file({ details: { programmeTitle: 'the tallow road', episodeLabel: '1.04' } }),
    );
    const [a, b] = [await row(first.deliverableId), await row(second.deliverableId)];
    expect(a).toMatchObject({ version_label: 'v2', content_kind: 'trailer' });
    expect(a.programme_id).not.toBeNull();
    expect([b.programme_id, b.episode_id]).toEqual([a.programme_id, a.episode_id]);
  });

  it('takes channels with an agreement, and none without', async () => {
    const agreed = await makeAgreedChannel(distributor, engineer);
    const foreign = await makeAgreedChannel(distributor, colleagueOfAnother);
    const upload = await begin(engineer, file({ details: { channelIds: [agreed] } }));
    expect(
      await db()('deliverable_channels').where({ deliverable_id: upload.deliverableId }).pluck('channel_id'),
    ).toEqual([agreed]);
    const { items } = value(
      await createUploads(engineer, [file({ details: { channelIds: [agreed, foreign] } })]),
    );
    expect(items[0]).toMatchObject({
      ok: false,
      error: { code: 'bad_input', fields: { channelIds: expect.any(String) } },
    });
  });

  it('refuses an episode without its programme, and leaves no upload behind', async () => {
    const person = await makePerson();
    const { items } = value(await createUploads(person, [file({ details: { episodeLabel: '1.04' } })]));
    expect(items[0]).toMatchObject({ ok: false, error: { code: 'bad_input' } });
    expect(value(await listUploads(person)).items).toEqual([]);
  });
});
