import { createServer } from 'node:http';
import type { RequestListener, Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { availableParallelism } from 'node:os';
import { FolderInUseError, FolderLock } from '../db/folder-lock';
import { openEmbedded, openPostgres } from '../db/client';
import type { Database } from '../db/client';
import { unreadRawFiles } from '../db/queries/raw-files';
import { runsInStates } from '../db/queries/runs';
import { createPool } from '../workers/node/pool';
import { createApp } from './app';
import { createAuth } from './auth/auth';
import { demoAccounts } from './auth/demo-accounts';
import { authSecret } from './auth/secret';
import { isLoopbackHost, readConfig } from './config';
import type { Config } from './config';
import type { Deps } from './deps';
import { EventHub } from './events/hub';
import { computeRun } from './jobs/compute-run';
import { JobQueue } from './jobs/queue';
import { readRawFile } from './jobs/read-raw-file';
import { createLog } from './log';
import { outbox } from './mail/outbox';
import { softwareVersion } from './paths';
import { seedDemoPeople, seedDemoRecords } from './seed/demo';
import { seedFirstGroup } from './seed/first-group';
import { ObjectStore } from './storage/object-store';

/** Start-up and shutdown of the server process. */

const SHUTDOWN_MS = 10_000;

async function main(): Promise<void> {
  const config = readConfig(process.env);
  const log = createLog(config.logLevel, config.logFile);
  const { database, release } = await openData(config);
  const storage = new ObjectStore(config.dataFolder);
  await storage.prepare();
  const workers = config.workers ?? Math.max(1, availableParallelism());
  const engine = createPool(workers);
  const queue = new JobQueue(database, log, workers);
  // The port is known only once it listens: who asks before the rest stands is told to come again, and not left waiting.
  let answer: RequestListener = (_req, res) => {
    res.writeHead(503, { 'retry-after': '1' }).end();
  };
  const server = createServer((req, res) => answer(req, res));
  const port = await listen(server, config);
  const baseUrl =
    config.publicUrl ?? `http://${config.host.includes(':') ? `[${config.host}]` : config.host}:${port}`;
  const trustedOrigins = originsOf(baseUrl, port, config);
  const deps: Deps = {
    config,
    db: database.db,
    auth: createAuth({
      db: database.db,
      secret: await authSecret(config.dataFolder),
      baseUrl,
      trustedOrigins,
      sendMail: outbox(config.dataFolder),
      log,
    }),
    storage,
    events: new EventHub(),
    jobs: queue,
    log,
    startUp: { ready: false, progress: 'Opening the bench', hasDemo: false },
    rateLimits: { general: 3000, signIn: 30 },
    trustedOrigins,
  };
  answer = createApp(deps);

  const stopping = new AbortController();
  const stop = shutdown({
    server,
    deps,
    queue,
    stopping,
    close: [() => engine.close(), () => database.close(), release],
  });
  process.on('SIGINT', stop);
  process.on('SIGTERM', stop);

  await queue.open();
  const madeFirst = await seedFirstGroup(deps);
  const seedRecords = await seedDemoPeople(deps);
  await queue.begin(
    {
      readRawFile: (id, isLastTry, signal) => readRawFile(deps, engine, id, isLastTry, signal),
      computeRun: (id, isLastTry, signal) => computeRun(deps, engine, id, isLastTry, signal),
    },
    {
      rawFileIds: (await unreadRawFiles(deps.db)).map((row) => row.id),
      runIds: (await runsInStates(deps.db, ['waiting', 'reading', 'computing'])).map((row) => row.id),
    },
  );
  deps.startUp.ready = true;
  deps.startUp.progress = null;
  welcome(config, baseUrl, deps, madeFirst);
  if (seedRecords) {
    try {
      await seedDemoRecords(deps, stopping.signal);
    } catch (cause) {
      deps.startUp.progress = null;
      if (!stopping.signal.aborted)
        log.error({ err: cause }, 'the demonstration could not be completed; it goes on at the next start');
    }
  }
}

async function openData(config: Config): Promise<{ database: Database; release: () => Promise<void> }> {
  if (config.databaseUrl === null) {
    return {
      database: await openEmbedded(config.dataFolder, config.cacheFolder),
      release: async () => undefined,
    };
  }
  // The rows are elsewhere, the files are not: they too belong to one server.
  const lock = await FolderLock.take(config.dataFolder);
  return { database: await openPostgres(config.databaseUrl), release: () => lock.release() };
}

function listen(server: Server, config: Config): Promise<number> {
  return new Promise((resolve, reject) => {
    server.once('error', reject);
    server.listen(config.port, config.host, () => {
      server.off('error', reject);
      resolve((server.address() as AddressInfo).port);
    });
  });
}

/** Where changes may come from: the own address, and on loopback its other names. */
function originsOf(baseUrl: string, port: number, config: Config): string[] {
  const origins = [new URL(baseUrl).origin];
  if (isLoopbackHost(config.host)) {
    origins.push(`http://127.0.0.1:${port}`, `http://localhost:${port}`, `http://[::1]:${port}`);
  }
  if (config.devOrigin !== null) origins.push(config.devOrigin);
  return [...new Set(origins)];
}

/** In this order: no new work, open requests end, event streams end, jobs stop at a safe place, everything is closed. */
function shutdown(parts: {
  server: Server;
  deps: Deps;
  queue: JobQueue;
  stopping: AbortController;
  close: (() => Promise<void>)[];
}): () => void {
  const { server, deps, queue, stopping } = parts;
  let isStopping = false;
  return () => {
    if (isStopping) process.exit(1);
    isStopping = true;
    stopping.abort(new Error('the server is shutting down'));
    void (async () => {
      deps.startUp.ready = false;
      const closed = new Promise<void>((resolve) => server.close(() => resolve()));
      deps.events.close();
      server.closeIdleConnections();
      await queue.close(SHUTDOWN_MS);
      server.closeAllConnections();
      await closed;
      for (const close of parts.close) await close();
      process.exit(0);
    })().catch((cause: unknown) => {
      deps.log.error({ err: cause }, 'shutdown');
      process.exit(1);
    });
  };
}

function welcome(config: Config, baseUrl: string, deps: Deps, madeFirst: boolean): void {
  console.log(`Gustbook ${softwareVersion} is at ${baseUrl}`);
  if (deps.startUp.hasDemo && isLoopbackHost(config.host)) {
    console.log('\nInvented demonstration; sign in as');
    for (const account of demoAccounts) {
      console.log(`  ${account.role.padEnd(10)}  ${account.email.padEnd(28)}  ${account.password}`);
    }
  }
  if (madeFirst) console.log(`\nThe link for the first lead lies in ${config.dataFolder}/outbox`);
}

main().catch((cause: unknown) => {
  const known =
    cause instanceof FolderInUseError || (cause instanceof Error && cause.message.startsWith('The settings'));
  const inUse = (cause as NodeJS.ErrnoException).code === 'EADDRINUSE';
  if (inUse) console.error('The port is taken by another program. Choose another one with PORT=….');
  else console.error(known ? (cause as Error).message : cause);
  process.exit(1);
});
