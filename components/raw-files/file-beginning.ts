/** The first part of a chosen file, read in the browser before anything is sent. */

export interface FileBeginning {
  text: string;
  /** The file goes on after the text. */
  isCutOff: boolean;
  isPacked: boolean;
  /** Size of the unpacked file, about; exact when it is not packed [bytes]. */
  unpackedBytes: number;
  /** Why it cannot be looked at here; null when it can. */
  problem: string | null;
}

export const beginningBytes = 64 * 1024;
/** Packed bytes that are unpacked to get there; numbers pack to a third or a quarter. */
const packedSliceBytes = 256 * 1024;

/** Reads up to 64 kB of text; gzip is told by its first two bytes, not by the name. */
export async function readBeginning(file: Blob): Promise<FileBeginning> {
  const head = new Uint8Array(await file.slice(0, 4).arrayBuffer());
  const none = { text: '', isCutOff: false, unpackedBytes: file.size };
  if (file.size === 0) return { ...none, isPacked: false, problem: 'The file is empty.' };
  if (head[0] === 0x50 && head[1] === 0x4b) {
    return {
      ...none,
      isPacked: true,
      problem: 'This is a zip archive. Unpack it and choose the files in it.',
    };
  }
  const isPacked = head[0] === 0x1f && head[1] === 0x8b;
  if (!isPacked) {
    const bytes = new Uint8Array(await file.slice(0, beginningBytes).arrayBuffer());
    return { ...textOf(bytes), isCutOff: file.size > bytes.length, isPacked, unpackedBytes: file.size };
  }
  if (typeof DecompressionStream === 'undefined') {
    return {
      ...none,
      isPacked,
      problem: 'This browser cannot unpack gzip. Use a newer one, or choose the unpacked file.',
    };
  }
  const unpacked = await unpackBeginning(file.slice(0, packedSliceBytes));
  if (unpacked.bytes.length === 0) {
    return { ...none, isPacked, problem: 'The file is packed with gzip, but it is damaged from the start.' };
  }
  const wholePacked = file.size <= packedSliceBytes && unpacked.isWhole;
  return {
    ...textOf(unpacked.bytes),
    isCutOff: !wholePacked,
    isPacked,
    unpackedBytes: wholePacked
      ? unpacked.bytes.length
      : Math.round((file.size / unpacked.packedBytes) * unpacked.bytes.length),
  };
}

/** Unpacks until there is enough; a stream that ends in the middle is what a slice looks like, and no error. */
async function unpackBeginning(
  slice: Blob,
): Promise<{ bytes: Uint8Array; isWhole: boolean; packedBytes: number }> {
  const reader = slice.stream().pipeThrough(new DecompressionStream('gzip')).getReader();
  const pieces: Uint8Array[] = [];
  let length = 0;
  let isWhole = false;
  try {
    while (length < beginningBytes) {
      const { done, value } = await reader.read();
      if (done) {
        isWhole = true;
        break;
      }
      pieces.push(value);
      length += value.length;
    }
  } catch {
    // the slice stops in mid-stream; what came out before is good
  }
  void reader.cancel().catch(() => undefined);
  const bytes = new Uint8Array(length);
  let at = 0;
  for (const piece of pieces) {
    bytes.set(piece, at);
    at += piece.length;
  }
  // how much of the slice went in is not told: numbers pack to about 0.35 (measured on invented records)
  return { bytes, isWhole, packedBytes: Math.max(1, Math.min(slice.size, Math.round(length * 0.35))) };
}

function textOf(bytes: Uint8Array): { text: string; problem: string | null } {
  const zeros = bytes.subarray(0, 4096).reduce((count, byte) => count + (byte === 0 ? 1 : 0), 0);
  if (zeros > 8) {
    return {
      text: '',
      problem:
        'This is binary data, not text. Convert it to text on the logger or with its own program first.',
    };
  }
  return { text: new TextDecoder('utf-8').decode(bytes), problem: null };
}

/** Largest file whose hash is worth having before it is sent [bytes]. */
const hashUpToBytes = 64 * 1024 * 1024;

/** SHA-256 of a whole file, or null where the browser cannot (plain http) or the file is large. */
export async function hashOfFile(file: Blob): Promise<string | null> {
  const subtle = typeof crypto === 'undefined' ? undefined : crypto.subtle;
  if (!subtle || file.size > hashUpToBytes) return null;
  const digest = await subtle.digest('SHA-256', await file.arrayBuffer());
  return [...new Uint8Array(digest)].map((byte) => byte.toString(16).padStart(2, '0')).join('');
}
