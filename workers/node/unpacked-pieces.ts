import { closeSync, createReadStream, openSync, readSync } from 'node:fs';
import { constants, createGunzip } from 'node:zlib';
import { RecordError } from '../../processing/records/record-error';

/** Bytes read at a time. */
const PIECE_BYTES = 256 * 1024;
/** Packed text may grow by this factor beyond the first `FREE_BYTES`; ordinary records unpack to 3–10 times their size. */
const MAX_EXPANSION = 250;
const FREE_BYTES = 64 * 1024 * 1024;

/**
 * The unpacked bytes of a raw file, plain or gzip (told by its first bytes, not its name; several members are read one after the other).
 * A plain piece is read at once (on a worker thread nothing else waits) and overwritten by the next one. Inflating runs on the runtime's own threads, beside whatever is done with the pieces.
 *
 * @param onRead told how many bytes of the file itself have been read
 * @throws RecordError when the file cannot be read or unpacked
 */
export async function* unpackedPieces(
  path: string,
  onRead: (bytes: number) => void,
): AsyncGenerator<Uint8Array> {
  const fd = attempt(() => openSync(path, 'r'));
  try {
    const buffer = Buffer.allocUnsafe(PIECE_BYTES);
    const read = (at: number): number => attempt(() => readSync(fd, buffer, 0, PIECE_BYTES, at));
    let bytesRead = read(0);
    if (bytesRead >= 2 && buffer[0] === 0x1f && buffer[1] === 0x8b) {
      yield* inflated(path, onRead);
      return;
    }
    for (let at = 0; bytesRead > 0; bytesRead = read(at)) {
      at += bytesRead;
      onRead(at);
      yield buffer.subarray(0, bytesRead);
    }
  } finally {
    closeSync(fd);
  }
}

function attempt<Result>(read: () => Result): Result {
  try {
    return read();
  } catch (cause) {
    throw unreadable(cause as NodeJS.ErrnoException);
  }
}

async function* inflated(path: string, onRead: (bytes: number) => void): AsyncGenerator<Uint8Array> {
  const source = createReadStream(path, { highWaterMark: PIECE_BYTES });
  const gunzip = createGunzip({ chunkSize: PIECE_BYTES, finishFlush: constants.Z_FINISH });
  let packed = 0;
  source.on('data', (piece) => {
    packed += piece.length;
    onRead(packed);
  });
  source.on('error', (cause) => gunzip.destroy(cause));
  source.pipe(gunzip);
  let unpacked = 0;
  try {
    for await (const piece of gunzip as AsyncIterable<Buffer>) {
      unpacked += piece.length;
      if (unpacked > FREE_BYTES && unpacked > packed * MAX_EXPANSION)
        throw new RecordError('expands-too-far', {
          message: `${unpacked} bytes from ${packed}`,
          userMessage: `The packed file grows to more than ${MAX_EXPANSION} times its size, which no record does. Reading was stopped; the file was kept as it is. Check where it comes from.`,
        });
      yield piece;
    }
  } catch (cause) {
    if (cause instanceof RecordError) throw cause;
    const { code, message } = cause as NodeJS.ErrnoException;
    if (code === 'Z_BUF_ERROR')
      throw new RecordError('truncated-gzip', {
        message,
        userMessage:
          'The packed file ends too early: it was cut off while it was written or transferred. It was kept as it is. Transfer it again, or unpack what can be saved and bring that in.',
      });
    if (code?.startsWith('Z_') === true)
      throw new RecordError('damaged-gzip', {
        message,
        userMessage:
          'The packed file is damaged and cannot be unpacked to its end. It was kept as it is. Transfer it again from the logger.',
      });
    throw unreadable(cause as NodeJS.ErrnoException);
  } finally {
    source.destroy();
    gunzip.destroy();
  }
}

function unreadable(cause: NodeJS.ErrnoException): RecordError {
  return new RecordError('unreadable-file', {
    message: cause.message,
    userMessage:
      cause.code === 'ENOENT'
        ? 'There is no such file. Check the path.'
        : `The file cannot be read from the disk (${cause.code ?? 'unknown reason'}). Check that it is a file, and its permissions.`,
  });
}
