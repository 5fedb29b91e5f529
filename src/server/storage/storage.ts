/** The S3-compatible store of originals and series. Audio goes there from the browser; only workers read it back. */
import {
  AbortMultipartUploadCommand,
  CompleteMultipartUploadCommand,
  CreateBucketCommand,
  CreateMultipartUploadCommand,
  DeleteObjectCommand,
  GetObjectCommand,
  HeadBucketCommand,
  HeadObjectCommand,
  ListPartsCommand,
  PutObjectCommand,
  S3Client,
  S3ServiceException,
  UploadPartCommand,
} from '@aws-sdk/client-s3';
import { getSignedUrl } from '@aws-sdk/s3-request-presigner';
import type { ByteSource } from '../../engine/source.ts';
import { config } from '../config.ts';
import { log } from '../log.ts';
import { contentTypeOf } from './content-type.ts';
import { PiecewiseSource } from './piecewise-source.ts';

/** Storage is away or answers wrongly: trouble of the surroundings, worth another try. */
export class StorageTrouble extends Error {
  constructor(doing: string, cause: unknown) {
    super(
      `Storage failed while ${doing}: ${cause instanceof Error ? cause.message || cause.name : String(cause)}`,
      { cause },
    );
    this.name = 'StorageTrouble';
  }
}

/** The object is not there, though storage is. */
export class ObjectMissing extends Error {
  constructor(readonly key: string) {
    super(`Storage has no object ${key}`);
    this.name = 'ObjectMissing';
  }
}

const partUrlSeconds = 4 * 60 * 60;
const playUrlSeconds = 6 * 60 * 60;

let inner: S3Client | undefined;
let outer: S3Client | undefined;

function makeClient(endpoint: string | undefined): S3Client {
  const { S3_REGION, S3_ACCESS_KEY_ID, S3_SECRET_ACCESS_KEY, S3_FORCE_PATH_STYLE } = config();
  return new S3Client({
    endpoint,
    region: S3_REGION,
    credentials: { accessKeyId: S3_ACCESS_KEY_ID, secretAccessKey: S3_SECRET_ACCESS_KEY },
    forcePathStyle: S3_FORCE_PATH_STYLE,
    // The default would sign the checksum of an empty body into every part's address.
    requestChecksumCalculation: 'WHEN_REQUIRED',
    responseChecksumValidation: 'WHEN_REQUIRED',
    maxAttempts: 3,
    requestHandler: { connectionTimeout: 5_000, requestTimeout: 60_000 },
  });
}
const client = () => (inner ??= makeClient(config().S3_ENDPOINT));
/** Signs addresses that browsers use: these name the public endpoint. */
const publicClient = () => (outer ??= makeClient(config().S3_PUBLIC_ENDPOINT));
const bucket = () => config().S3_BUCKET;

const statusOf = (error: unknown) =>
  error instanceof S3ServiceException ? error.$metadata.httpStatusCode : undefined;
const nameOf = (error: unknown) => (error instanceof Error ? error.name : '');

async function asking<T>(doing: string, ask: () => Promise<T>): Promise<T> {
  try {
    return await ask();
  } catch (error) {
    if (error instanceof StorageTrouble || error instanceof ObjectMissing || nameOf(error) === 'AbortError')
      throw error;
    throw new StorageTrouble(doing, error);
  }
}

let bucketSeen: Promise<void> | undefined;
/** Makes the bucket where it is missing (a local start); asks once per process. Throws StorageTrouble. */
export function ensureBucket(): Promise<void> {
  bucketSeen ??= asking('looking for its bucket', async () => {
    try {
      await client().send(new HeadBucketCommand({ Bucket: bucket() }));
    } catch (error) {
      if (statusOf(error) !== 404) throw error;
      await client().send(new CreateBucketCommand({ Bucket: bucket() }));
    }
  }).catch((error: unknown) => {
    bucketSeen = undefined;
    throw error;
  });
  return bucketSeen;
}

/** Begins a multipart upload and gives storage's name for it. */
export async function createMultipart(key: string): Promise<string> {
  await ensureBucket();
  return asking('beginning an upload', async () => {
    const { UploadId } = await client().send(
      new CreateMultipartUploadCommand({
        Bucket: bucket(),
        Key: key,
        ContentType: 'application/octet-stream',
      }),
    );
    if (!UploadId) throw new Error('no upload id was given');
    return UploadId;
  });
}

/** The address to which a browser puts one part; valid for four hours, for exactly this many bytes. */
export function presignedPart(
  key: string,
  uploadId: string,
  number: number,
  byteSize: number,
): Promise<string> {
  return getSignedUrl(
    publicClient(),
    new UploadPartCommand({
      Bucket: bucket(),
      Key: key,
      UploadId: uploadId,
      PartNumber: number,
      ContentLength: byteSize,
    }),
    { expiresIn: partUrlSeconds, signableHeaders: new Set(['content-length']) },
  );
}

/** Whether storage still knows a multipart upload; stores that cannot list parts answer 'unknown'. */
export async function multipartStands(key: string, uploadId: string): Promise<'stands' | 'gone' | 'unknown'> {
  try {
    await client().send(
      new ListPartsCommand({ Bucket: bucket(), Key: key, UploadId: uploadId, MaxParts: 1 }),
    );
    return 'stands';
  } catch (error) {
    if (nameOf(error) === 'NoSuchUpload') return 'gone';
    if (statusOf(error) === 405 || statusOf(error) === 501) return 'unknown';
    throw new StorageTrouble('looking for an upload', error);
  }
}

/** Joins the parts. 'incomplete' when storage does not hold all of them as told; throws StorageTrouble otherwise. */
export async function completeMultipart(
  key: string,
  uploadId: string,
  parts: readonly { number: number; etag: string }[],
): Promise<'done' | 'incomplete' | 'gone'> {
  try {
    await client().send(
      new CompleteMultipartUploadCommand({
        Bucket: bucket(),
        Key: key,
        UploadId: uploadId,
        MultipartUpload: { Parts: parts.map(({ number, etag }) => ({ PartNumber: number, ETag: etag })) },
      }),
    );
    return 'done';
  } catch (error) {
    if (nameOf(error) === 'NoSuchUpload') return 'gone';
    if (['InvalidPart', 'InvalidPartOrder', 'EntityTooSmall'].includes(nameOf(error))) return 'incomplete';
    throw new StorageTrouble('joining the parts of an upload', error);
  }
}

/** Drops a multipart upload. A store that refuses to (405, 501) or has forgotten it counts as done. */
export async function abortMultipart(key: string, uploadId: string): Promise<void> {
  try {
    await client().send(new AbortMultipartUploadCommand({ Bucket: bucket(), Key: key, UploadId: uploadId }));
  } catch (error) {
    if (nameOf(error) === 'NoSuchUpload' || [404, 405, 501].includes(statusOf(error) ?? 0)) {
      log.info({ key, err: nameOf(error) }, 'storage did not take the abort of an upload');
      return;
    }
    throw new StorageTrouble('dropping an upload', error);
  }
}

/** Size in bytes of an object; `null` when there is none. */
export async function headObject(key: string): Promise<{ byteSize: number } | null> {
  try {
    const { ContentLength } = await client().send(new HeadObjectCommand({ Bucket: bucket(), Key: key }));
    if (ContentLength === undefined) throw new Error('no size was told');
    return { byteSize: ContentLength };
  } catch (error) {
    if (nameOf(error) === 'NotFound' || nameOf(error) === 'NoSuchKey') return null;
    throw new StorageTrouble('looking for an object', error);
  }
}

/** Bytes `start` up to and without `end`. Throws ObjectMissing, or StorageTrouble also when fewer bytes came. */
export function getRange(key: string, start: number, end: number, signal?: AbortSignal): Promise<Uint8Array> {
  return asking('reading an object', async () => {
    try {
      const { Body } = await client().send(
        new GetObjectCommand({ Bucket: bucket(), Key: key, Range: `bytes=${start}-${end - 1}` }),
        { abortSignal: signal },
      );
      const bytes = await Body?.transformToByteArray();
      if (bytes?.length !== end - start)
        throw new Error(`${bytes?.length ?? 0} bytes came of ${end - start}`);
      return bytes;
    } catch (error) {
      if (nameOf(error) === 'NoSuchKey') throw new ObjectMissing(key);
      throw error;
    }
  });
}

/** The bytes of a stored object as the engine reads them. Throws ObjectMissing or StorageTrouble from `read`. */
export const objectSource = (key: string, size: number, signal?: AbortSignal): ByteSource =>
  new PiecewiseSource(size, (start, end) => getRange(key, start, end, signal));

/** A whole small object, such as a measurement's series. Throws ObjectMissing or StorageTrouble. */
export function getObject(key: string): Promise<Uint8Array> {
  return asking('reading an object', async () => {
    try {
      const { Body } = await client().send(new GetObjectCommand({ Bucket: bucket(), Key: key }));
      if (!Body) throw new Error('no body came');
      return await Body.transformToByteArray();
    } catch (error) {
      if (nameOf(error) === 'NoSuchKey') throw new ObjectMissing(key);
      throw error;
    }
  });
}

/** Writes a whole object of bytes, over any that stood under the key. */
export async function putObject(
  key: string,
  bytes: Uint8Array,
  contentType = 'application/octet-stream',
): Promise<void> {
  await ensureBucket();
  await asking('writing an object', () =>
    client().send(
      new PutObjectCommand({ Bucket: bucket(), Key: key, Body: bytes, ContentType: contentType }),
    ),
  );
}

/** Removes an object; nothing happens where there is none. */
export async function deleteObject(key: string): Promise<void> {
  await asking('removing an object', () =>
    client().send(new DeleteObjectCommand({ Bucket: bucket(), Key: key })),
  );
}

/** The address from which a browser plays or saves an original, under its own name; valid for six hours. */
export function presignedGet(key: string, fileName: string): Promise<string> {
  const type = contentTypeOf(fileName);
  const manner = type === 'application/octet-stream' ? 'attachment' : 'inline';
  const named = encodeURIComponent(fileName).replace(
    /['()*]/g,
    (c) => `%${c.charCodeAt(0).toString(16).toUpperCase()}`,
  );
  return getSignedUrl(
    publicClient(),
    new GetObjectCommand({
      Bucket: bucket(),
      Key: key,
      ResponseContentType: type,
      ResponseContentDisposition: `${manner}; filename*=UTF-8''${named}`,
    }),
    { expiresIn: playUrlSeconds },
  );
}

/** Lets the connections go; the next call opens new ones. */
export function closeStorage(): void {
  inner?.destroy();
  outer?.destroy();
  inner = outer = bucketSeen = undefined;
}

export const originalKey = (organisationId: string, deliverableId: string) =>
  `originals/${organisationId}/${deliverableId}`;
/** Names a set of files; nothing lies there, for its files lie where they were sent. */
export const setKey = (organisationId: string, deliverableId: string) =>
  `sets/${organisationId}/${deliverableId}`;
/** One series per deliverable, engine version, parameters and place of the presentation, as measurements are unique by them. */
export const seriesKey = (
  organisationId: string,
  deliverableId: string,
  engineVersion: string,
  parametersHash: string,
  position: number,
) => `series/${organisationId}/${deliverableId}/${engineVersion}-${parametersHash.slice(0, 16)}-${position}`;
