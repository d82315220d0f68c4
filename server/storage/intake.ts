import { createHash } from 'node:crypto';
import type { Hash } from 'node:crypto';
import { open } from 'node:fs/promises';
import { createGunzip } from 'node:zlib';
import { AppError } from '../errors';

/** Bytes at the start of a content by which two files are compared before more is read. */
export const HEAD_BYTES = 4096;

export interface IntakeLimits {
  maxBytes: number;
  maxContentBytes: number;
  maxExpansion: number;
}

/** What was learned about a file while its bytes went to disk. */
export interface Intake {
  bytes: number;
  sha256: string;
  packed: boolean;
  /** Of the unpacked content; of the bytes themselves when the packing is damaged (reading will say so). */
  contentHash: string;
  contentBytes: number;
  headHash: string;
  /** SHA-256 of the content's beginning at each asked length that it reaches. */
  prefixHashes: Map<number, string>;
}

/** Hashes a content once and notes the hash of its beginning at given lengths on the way. */
export class ContentHasher {
  private readonly whole: Hash = createHash('sha256');
  private readonly lengths: number[];
  private next = 0;
  private head: Buffer[] = [];
  private headLength = 0;
  length = 0;
  readonly prefixHashes = new Map<number, string>();

  /** @param lengths at which the beginning's hash is wanted [bytes] */
  constructor(lengths: Iterable<number>) {
    this.lengths = [...new Set(lengths)].filter((length) => length > 0).sort((a, b) => a - b);
  }

  update(chunk: Uint8Array): void {
    if (this.headLength < HEAD_BYTES) {
      const part = Buffer.from(chunk.subarray(0, HEAD_BYTES - this.headLength));
      this.head.push(part);
      this.headLength += part.length;
    }
    let from = 0;
    while (this.next < this.lengths.length && this.lengths[this.next] <= this.length + chunk.length) {
      const at = this.lengths[this.next] - this.length;
      this.whole.update(chunk.subarray(from, at));
      this.prefixHashes.set(this.lengths[this.next], this.whole.copy().digest('hex'));
      from = at;
      this.next++;
    }
    this.whole.update(from === 0 ? chunk : chunk.subarray(from));
    this.length += chunk.length;
  }

  finish(): { contentHash: string; headHash: string } {
    return {
      contentHash: this.whole.digest('hex'),
      headHash: createHash('sha256').update(Buffer.concat(this.head)).digest('hex'),
    };
  }
}

function megabytes(bytes: number): string {
  return bytes >= 1024 ** 3
    ? `${(bytes / 1024 ** 3).toFixed(1)} GiB`
    : `${(bytes / 1024 ** 2).toFixed(0)} MiB`;
}

function tooLarge(limits: IntakeLimits): AppError {
  return new AppError('too_large', {
    userMessage: `The file is larger than ${megabytes(limits.maxBytes)}, the most that this server takes in one file. Nothing was stored. Split it, or ask for a higher limit.`,
  });
}

function expandsTooFar(limits: IntakeLimits): AppError {
  return new AppError('too_large', {
    userMessage: `The file unpacks to more than this server allows (${megabytes(limits.maxContentBytes)}, or ${limits.maxExpansion} times its own size). Nothing was stored. Bring it in unpacked, in parts.`,
  });
}

/**
 * Writes a stream to a file and learns its hashes on the way; nothing is held in memory but the piece in hand. The file is complete and
 * closed when this returns; syncing it is the store's business.
 *
 * @param source of the bytes; must fail when they do not all arrive
 * @param path a new file
 * @param lengths at which the hash of the content's beginning is wanted
 */
export async function takeIn(
  source: AsyncIterable<Uint8Array>,
  path: string,
  lengths: number[],
  limits: IntakeLimits,
): Promise<Intake> {
  const sha256 = createHash('sha256');
  const plain = new ContentHasher(lengths);
  let unpacker: Unpacker | null = null;
  let bytes = 0;
  let opening: Buffer = Buffer.alloc(0);
  let isDecided = false;
  const file = await open(path, 'wx', 0o600);
  try {
    const feed = async (chunk: Uint8Array) => {
      if (unpacker === null) plain.update(chunk);
      else await unpacker.write(chunk);
    };
    for await (const chunk of source) {
      bytes += chunk.length;
      if (bytes > limits.maxBytes) throw tooLarge(limits);
      sha256.update(chunk);
      for (let written = 0; written < chunk.length;) {
        written += (await file.write(chunk, written)).bytesWritten;
      }
      if (isDecided) {
        await feed(chunk);
        continue;
      }
      opening = Buffer.concat([opening, chunk]);
      if (opening.length < 2) continue;
      isDecided = true;
      if (opening[0] === 0x1f && opening[1] === 0x8b) unpacker = new Unpacker(lengths, limits);
      await feed(opening);
    }
    if (!isDecided) await feed(opening);
    const ownHash = sha256.digest('hex');
    // The compiler does not see the assignment inside the loop above.
    const content = unpacker === null ? null : await (unpacker as Unpacker).finish(bytes);
    if (unpacker === null || content === null) {
      // A damaged packing is kept as it is: the reader will say what is wrong with it.
      const { contentHash, headHash } =
        unpacker === null ? plain.finish() : { contentHash: ownHash, headHash: ownHash };
      return {
        bytes,
        sha256: ownHash,
        packed: unpacker !== null,
        contentHash,
        contentBytes: bytes,
        headHash,
        prefixHashes: unpacker === null ? plain.prefixHashes : new Map(),
      };
    }
    return {
      bytes,
      sha256: ownHash,
      packed: true,
      contentHash: content.contentHash,
      contentBytes: content.contentBytes,
      headHash: content.headHash,
      prefixHashes: content.prefixHashes,
    };
  } catch (cause) {
    (unpacker as Unpacker | null)?.abandon();
    if ((cause as NodeJS.ErrnoException).code === 'ENOSPC') {
      throw new AppError('unavailable', {
        message: 'disk full while taking in a file',
        userMessage:
          'The disk of the server is full, so the file was not stored. What was stored before is safe. Make room and bring it in again.',
        cause,
      });
    }
    throw cause;
  } finally {
    await file.close();
  }
}

/** Unpacks gzip beside the writing, for the hash of the content alone. */
class Unpacker {
  private readonly gunzip = createGunzip();
  private readonly hasher: ContentHasher;
  private packedBytes = 0;
  private damage: Error | null = null;
  private refusal: AppError | null = null;
  private readonly done: Promise<void>;
  /** Wakes a writer that waits for room; also when there will never be any. */
  private wake: () => void = () => undefined;

  constructor(
    lengths: number[],
    private readonly limits: IntakeLimits,
  ) {
    this.hasher = new ContentHasher(lengths);
    this.done = new Promise((resolve) => {
      this.gunzip.on('data', (chunk: Buffer) => {
        if (this.refusal !== null) return;
        this.hasher.update(chunk);
        const allowed = Math.min(
          this.limits.maxContentBytes,
          // A small file may well unpack to a few hundred times its size: the ratio counts from 1 MiB on.
          Math.max(this.packedBytes, 1024 ** 2) * this.limits.maxExpansion,
        );
        if (this.hasher.length > allowed) {
          this.refusal = expandsTooFar(this.limits);
          this.gunzip.destroy();
        }
      });
      this.gunzip.on('error', (cause) => {
        this.damage = cause;
      });
      this.gunzip.on('close', () => {
        this.wake();
        resolve();
      });
      this.gunzip.on('drain', () => this.wake());
    });
  }

  /** @throws AppError too_large */
  async write(chunk: Uint8Array): Promise<void> {
    this.packedBytes += chunk.length;
    if (
      this.damage === null &&
      this.refusal === null &&
      !this.gunzip.destroyed &&
      !this.gunzip.write(chunk)
    ) {
      await new Promise<void>((resolve) => {
        this.wake = resolve;
        if (this.gunzip.destroyed || !this.gunzip.writableNeedDrain) resolve();
      });
    }
    if (this.refusal !== null) throw this.refusal;
  }

  /** @returns null when the packing is damaged */
  async finish(packedBytes: number): Promise<Omit<Intake, 'bytes' | 'sha256' | 'packed'> | null> {
    this.packedBytes = packedBytes;
    if (!this.gunzip.destroyed) this.gunzip.end();
    await this.done;
    if (this.refusal !== null) throw this.refusal;
    if (this.damage !== null) return null;
    const hashes = this.hasher.finish();
    return { ...hashes, contentBytes: this.hasher.length, prefixHashes: this.hasher.prefixHashes };
  }

  abandon(): void {
    this.gunzip.destroy();
  }
}

/** SHA-256 of the first `length` bytes of a stored file's content. */
export async function contentPrefixHash(
  source: AsyncIterable<Uint8Array>,
  length: number,
): Promise<string | null> {
  const hash = createHash('sha256');
  let seen = 0;
  for await (const chunk of source) {
    const part = chunk.subarray(0, length - seen);
    hash.update(part);
    seen += part.length;
    if (seen >= length) return hash.digest('hex');
  }
  return null;
}
