import { EventEmitter } from 'node:events';
import type { GroupEvent } from '../contract/api';

/** Hands events of a group to whoever listens to that group; nobody hears of another group's. */
export class EventHub {
  private readonly emitter = new EventEmitter();

  constructor() {
    // One listener per open page.
    this.emitter.setMaxListeners(0);
  }

  publish(groupId: string, event: GroupEvent): void {
    this.emitter.emit(groupId, event);
  }

  /** @returns how to stop listening */
  listen(groupId: string, listener: (event: GroupEvent) => void): () => void {
    this.emitter.on(groupId, listener);
    return () => this.emitter.off(groupId, listener);
  }

  listeners(groupId: string): number {
    return this.emitter.listenerCount(groupId);
  }
}
