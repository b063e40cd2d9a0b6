import { createHash, webcrypto } from 'node:crypto';
import {
  CreateBucketCommand,
  DeleteObjectCommand,
  GetObjectCommand,
  HeadBucketCommand,
  ListObjectsCommand,
  NoSuchKey,
  PutObjectCommand,
  S3Client,
} from '@aws-sdk/client-s3';

export interface StorageOptions {
  endpoint: string;
  bucket: string;
  accessKeyId: string;
  secretAccessKey: string;
}

export interface Stored {
  sha256: string;
  bytes: number;
}

export interface ListedObject {
  key: string;
  /** By the clock of the store. */
  storedAt: Date;
  bytes: number;
}

export interface Storage {
  /** Stores, reads back, and compares length and SHA-256; throws and removes the object where they differ. */
  putVerified(key: string, bytes: Uint8Array): Promise<Stored>;
  /** Null where there is no such object. */
  get(key: string): Promise<Buffer | null>;
  delete(key: string): Promise<void>;
  /** All objects whose keys begin with `prefix`, page by page in the order of their keys. */
  list(prefix: string, pageSize?: number): AsyncIterable<ListedObject[]>;
  ensureBucket(): Promise<void>;
  /** Throws where the store doesn't answer. */
  ping(): Promise<void>;
  close(): void;
}

/** SHA-256 of bytes in memory, computed by a thread of Node's pool: 60 MB would hold up every other answer for a while. */
export async function sha256Of(bytes: Uint8Array): Promise<string> {
  return Buffer.from(await webcrypto.subtle.digest('SHA-256', bytes)).toString('hex');
}

const statusOf = (error: unknown): number | undefined =>
  (error as { $metadata?: { httpStatusCode?: number } }).$metadata?.httpStatusCode;

/**
 * An object store that speaks the S3 protocol. Addresses are never signed and handed out: who may read what is ours.
 * Checksum trailers are off, because a local store that doesn't know them keeps the trailer within the object.
 */
export function openStorage(options: StorageOptions): Storage {
  const { bucket: Bucket } = options;
  const client = new S3Client({
    region: 'local',
    endpoint: options.endpoint,
    forcePathStyle: true,
    requestChecksumCalculation: 'WHEN_REQUIRED',
    responseChecksumValidation: 'WHEN_REQUIRED',
    credentials: { accessKeyId: options.accessKeyId, secretAccessKey: options.secretAccessKey },
    maxAttempts: 3,
  });

  const get = async (Key: string): Promise<Buffer | null> => {
    try {
      const { Body } = await client.send(new GetObjectCommand({ Bucket, Key }));
      return Body ? Buffer.from(await Body.transformToByteArray()) : Buffer.alloc(0);
    } catch (error) {
      if (error instanceof NoSuchKey || statusOf(error) === 404) return null;
      throw error;
    }
  };
  const remove = async (Key: string): Promise<void> => {
    await client.send(new DeleteObjectCommand({ Bucket, Key }));
  };

  // The first version of the call: its pages go on from a key. The second one's go on from a token, which a local store
  // may be unable to make.
  async function* list(Prefix: string, MaxKeys = 1000): AsyncGenerator<ListedObject[]> {
    let Marker: string | undefined;
    do {
      const page = await client.send(new ListObjectsCommand({ Bucket, Prefix, MaxKeys, Marker }));
      const objects = page.Contents ?? [];
      yield objects.flatMap(({ Key, LastModified, Size = 0 }) =>
        Key !== undefined && LastModified ? [{ key: Key, storedAt: LastModified, bytes: Size }] : [],
      );
      Marker = page.IsTruncated ? objects.at(-1)?.Key : undefined;
    } while (Marker !== undefined);
  }

  /** Length and SHA-256 of an object as it streams in, never held as a whole; null where there is none. */
  const measure = async (Key: string): Promise<Stored | null> => {
    try {
      const { Body } = await client.send(new GetObjectCommand({ Bucket, Key }));
      const hash = createHash('sha256');
      let bytes = 0;
      for await (const chunk of (Body ?? []) as AsyncIterable<Uint8Array>) {
        hash.update(chunk);
        bytes += chunk.byteLength;
      }
      return { sha256: hash.digest('hex'), bytes };
    } catch (error) {
      if (error instanceof NoSuchKey || statusOf(error) === 404) return null;
      throw error;
    }
  };

  const put = (Key: string, Body: Uint8Array, sha256: string) => {
    const command = new PutObjectCommand({ Bucket, Key, Body, ContentLength: Body.byteLength });
    // Given, the signer takes this hash instead of making one of its own, in one piece, of the whole body.
    command.middlewareStack.add(
      (next) => (args) => {
        (args.request as { headers: Record<string, string> }).headers['x-amz-content-sha256'] = sha256;
        return next(args);
      },
      { step: 'build', name: 'knownPayloadHash' },
    );
    return client.send(command);
  };

  return {
    get,
    delete: remove,
    list,
    async putVerified(Key, bytes) {
      const sha256 = await sha256Of(bytes);
      await put(Key, bytes, sha256);
      const back = await measure(Key);
      if (back?.bytes !== bytes.byteLength || back.sha256 !== sha256) {
        await remove(Key);
        throw new Error(
          `The object store kept ${back?.bytes ?? 0} other bytes for the ${bytes.byteLength} of ${Key}.`,
        );
      }
      return back;
    },
    async ensureBucket() {
      try {
        await client.send(new HeadBucketCommand({ Bucket }));
      } catch (error) {
        if (statusOf(error) !== 404) throw error;
        await client.send(new CreateBucketCommand({ Bucket }));
      }
    },
    async ping() {
      await client.send(new HeadBucketCommand({ Bucket }), { abortSignal: AbortSignal.timeout(2000) });
    },
    close: () => client.destroy(),
  };
}
