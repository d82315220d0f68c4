import { uploadedSchema } from '../../server/contract/api';
import type { RawFile, Uploaded } from '../../server/contract/api';
import { errorEnvelopeSchema } from '../../server/contract/errors';

/**
 * Files on their way to the server: two at a time, each with its progress, each can be cancelled and sent again. The queue lives
 * outside of the screens, so that going to another page does not stop it.
 */

export type UploadState = 'waiting' | 'sending' | 'kept' | 'already-here' | 'failed' | 'cancelled';

export interface UploadItem {
  /** Also the id of the raw file, so that sending twice is harmless. */
  id: string;
  file: File;
  layoutId: string;
  /** Hash of the recipe to compute with when all is read; null: do not. */
  computeWith: string | null;
  state: UploadState;
  sentBytes: number;
  /** What happened, for failed; what the server said. */
  message: string | null;
  rawFile: RawFile | null;
}

/** The part of XMLHttpRequest that is used; fetch tells no upload progress. */
export interface Transport {
  send(
    item: Pick<UploadItem, 'id' | 'file' | 'layoutId' | 'computeWith'>,
    on: {
      progress: (sentBytes: number) => void;
      done: (status: number, body: string) => void;
      broken: () => void;
    },
  ): () => void;
}

export function httpTransport(address: string): Transport {
  return {
    send(item, on) {
      const request = new XMLHttpRequest();
      const query = item.computeWith === null ? '' : `?compute=${item.computeWith}`;
      request.open('POST', `/api${address}/raw-files${query}`);
      request.withCredentials = true;
      request.upload.onprogress = (event) => on.progress(Math.min(item.file.size, event.loaded));
      request.onload = () => on.done(request.status, request.responseText);
      request.onerror = () => on.broken();
      request.ontimeout = () => on.broken();
      const form = new FormData();
      form.append('id', item.id);
      form.append('layoutId', item.layoutId);
      form.append('file', item.file, item.file.name);
      request.send(form);
      return () => request.abort();
    },
  };
}

const atOnce = 2;

export interface UploadCounts {
  total: number;
  kept: number;
  alreadyHere: number;
  failed: number;
  toGo: number;
  bytes: number;
  sentBytes: number;
}

export class UploadQueue {
  private items: readonly UploadItem[] = [];
  private readonly listeners = new Set<() => void>();
  private readonly aborts = new Map<string, () => void>();

  constructor(
    private readonly transport: Transport,
    private readonly onKept: (item: UploadItem) => void = () => undefined,
  ) {}

  subscribe = (listener: () => void): (() => void) => {
    this.listeners.add(listener);
    return () => this.listeners.delete(listener);
  };

  snapshot = (): readonly UploadItem[] => this.items;

  /**
   * @param computeWith hash of the recipe to compute with when all of these are read: it travels with the last of them, which is sent
   * only when the others are done, so that one run is started and not one a file
   */
  add(files: readonly { id: string; file: File }[], layoutId: string, computeWith: string | null): void {
    const added = files.map(({ id, file }, index): UploadItem => ({
      id,
      file,
      layoutId,
      computeWith: index === files.length - 1 ? computeWith : null,
      state: 'waiting',
      sentBytes: 0,
      message: null,
      rawFile: null,
    }));
    this.items = [...this.items, ...added];
    this.tell();
    this.fill();
  }

  /** Marks a file that is here already, without sending it. */
  addPresent(files: readonly { id: string; file: File }[], layoutId: string): void {
    this.items = [
      ...this.items,
      ...files.map(({ id, file }): UploadItem => ({
        id,
        file,
        layoutId,
        computeWith: null,
        state: 'already-here',
        sentBytes: file.size,
        message: null,
        rawFile: null,
      })),
    ];
    this.tell();
  }

  cancel(id: string): void {
    this.aborts.get(id)?.();
    this.aborts.delete(id);
    this.change(id, (item) =>
      item.state === 'waiting' || item.state === 'sending'
        ? { ...item, state: 'cancelled', sentBytes: 0 }
        : item,
    );
    this.fill();
  }

  cancelAll(): void {
    for (const item of this.items)
      if (item.state === 'waiting' || item.state === 'sending') this.cancel(item.id);
  }

  retry(id: string): void {
    this.change(id, (item) =>
      item.state === 'failed' || item.state === 'cancelled'
        ? { ...item, state: 'waiting', sentBytes: 0, message: null }
        : item,
    );
    this.fill();
  }

  /** Takes what is finished off the list; what is under way or went wrong stays. */
  clearFinished(): void {
    this.items = this.items.filter(
      (item) => item.state === 'waiting' || item.state === 'sending' || item.state === 'failed',
    );
    this.tell();
  }

  private fill(): void {
    while (this.items.filter((item) => item.state === 'sending').length < atOnce) {
      const next = this.items.find((item) => item.state === 'waiting');
      if (!next) return;
      const mustBeLast = next.computeWith !== null && this.items.some((item) => item.state === 'sending');
      if (mustBeLast) return;
      this.start(next);
    }
  }

  private start(next: UploadItem): void {
    this.change(next.id, (item) => ({ ...item, state: 'sending' }));
    const finish = (changed: Partial<UploadItem>): void => {
      this.aborts.delete(next.id);
      this.change(next.id, (item) => ({ ...item, ...changed }));
      const item = this.items.find((known) => known.id === next.id);
      if (item && (item.state === 'kept' || item.state === 'already-here')) this.onKept(item);
      this.fill();
    };
    const abort = this.transport.send(next, {
      progress: (sentBytes) => this.change(next.id, (item) => ({ ...item, sentBytes })),
      broken: () =>
        finish({
          state: 'failed',
          sentBytes: 0,
          message: 'The connection broke. Nothing of this file was kept; send it again.',
        }),
      done: (status, body) => {
        const answer = answerOf(status, body);
        finish(
          'uploaded' in answer
            ? {
                state: answer.uploaded.duplicate ? 'already-here' : 'kept',
                sentBytes: next.file.size,
                rawFile: answer.uploaded.rawFile,
                message: answer.uploaded.rawFile.problem,
              }
            : { state: 'failed', sentBytes: 0, message: answer.message },
        );
      },
    });
    if (this.items.find((item) => item.id === next.id)?.state === 'sending') this.aborts.set(next.id, abort);
  }

  private change(id: string, to: (item: UploadItem) => UploadItem): void {
    this.items = this.items.map((item) => (item.id === id ? to(item) : item));
    this.tell();
  }

  private tell(): void {
    for (const listener of this.listeners) listener();
  }
}

/** What the server said of a file, or words for people when it did not take it. */
function answerOf(status: number, body: string): { uploaded: Uploaded } | { message: string } {
  let value: unknown;
  try {
    value = JSON.parse(body);
  } catch {
    return {
      message: `The server answered with status ${status} and no words. Nothing of this file was kept; send it again.`,
    };
  }
  if (status >= 200 && status < 300) {
    const parsed = uploadedSchema.safeParse(value);
    return parsed.success
      ? { uploaded: parsed.data }
      : {
          message:
            'The server took the file, but its answer could not be read. Load the page again to see it in the list.',
        };
  }
  const envelope = errorEnvelopeSchema.safeParse(value);
  return {
    message: envelope.success
      ? envelope.data.error.message
      : `The server refused this file (status ${status}).`,
  };
}

export function countUploads(items: readonly UploadItem[]): UploadCounts {
  const of = (...states: UploadState[]): number => items.filter((item) => states.includes(item.state)).length;
  return {
    total: items.length,
    kept: of('kept'),
    alreadyHere: of('already-here'),
    failed: of('failed'),
    toGo: of('waiting', 'sending'),
    bytes: items.filter((item) => item.state !== 'cancelled').reduce((sum, item) => sum + item.file.size, 0),
    sentBytes: items.reduce((sum, item) => sum + item.sentBytes, 0),
  };
}

export function isBusy(items: readonly UploadItem[]): boolean {
  return items.some((item) => item.state === 'waiting' || item.state === 'sending');
}
