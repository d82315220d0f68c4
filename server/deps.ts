import type { Db } from '../db/client';
import type { Auth } from './auth/auth';
import type { Config } from './config';
import type { EventHub } from './events/hub';
import type { Jobs } from './jobs/jobs';
import type { Log } from './log';
import type { ObjectStore } from './storage/object-store';

/** What start-up is doing; read by the health route while the server already answers. */
export interface StartUp {
  ready: boolean;
  progress: string | null;
  /** Demonstration accounts exist in this data folder. */
  hasDemo: boolean;
}

/** Requests per minute and address. */
export interface RateLimits {
  general: number;
  signIn: number;
}

/** Everything the application needs, given once; nothing below reaches for globals. */
export interface Deps {
  config: Config;
  db: Db;
  auth: Auth;
  storage: ObjectStore;
  events: EventHub;
  jobs: Jobs;
  log: Log;
  startUp: StartUp;
  rateLimits: RateLimits;
  /** Origins that a browser may send changes from. */
  trustedOrigins: string[];
}
