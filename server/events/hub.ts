import { EventEmitter } from 'node:events';
import type { GroupEvent } from '../contract/api';

/** Hands events of a group to whoever listens to that group; nobody hears of another group's. */
export class EventHub {
  private readonly emitter = new EventEmitter();
  private readonly closing = new EventEmitter();

  constructor() {
    // One listener per open page.
    this.emitter.setMaxListeners(0);
    this.closing.setMaxListeners(0);
  }

  publish(groupId: string, event: GroupEvent): void {
    this.emitter.emit(groupId, event);
  }

  /** @returns how to stop listening */
  listen(groupId: string, listener: (event: GroupEvent) => void): () => void {
    this.emitter.on(groupId, listener);
    return () => this.emitter.off(groupId, listener);
  }

  /** Runs when the server goes down, so that open streams end by themselves. @returns how to call it off */
  onClose(end: () => void): () => void {
    this.closing.once('close', end);
    return () => this.closing.off('close', end);
  }

  close(): void {
    this.closing.emit('close');
  }

  listeners(groupId: string): number {
    return this.emitter.listenerCount(groupId);
  }
}
