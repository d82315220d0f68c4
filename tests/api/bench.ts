import { randomUUID } from 'node:crypto';
import { createServer } from 'node:http';
import type { Server } from 'node:http';
import { mkdtemp, rm } from 'node:fs/promises';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import request from 'supertest';
import type { Test } from 'supertest';
import { openEmbedded } from '../../db/client';
import type { Database } from '../../db/client';
import { addGroup } from '../../db/queries/groups';
import { createApp } from '../../server/app';
import { ensureAccount } from '../../server/auth/accounts';
import { createAuth } from '../../server/auth/auth';
import { readConfig } from '../../server/config';
import type { Config } from '../../server/config';
import { roles } from '../../server/contract/roles';
import type { Role } from '../../server/contract/roles';
import type { Deps } from '../../server/deps';
import { EventHub } from '../../server/events/hub';
import { computeRun } from '../../server/jobs/compute-run';
import type { Engine } from '../../server/jobs/engine';
import { JobQueue } from '../../server/jobs/queue';
import { readRawFile } from '../../server/jobs/read-raw-file';
import { createLog } from '../../server/log';
import { outbox } from '../../server/mail/outbox';
import { projectRoot } from '../../server/paths';
import { ObjectStore } from '../../server/storage/object-store';
import type { Layout } from '../../processing/schemas/layout';
import type { SetUp, Station } from '../../processing/schemas/set-up';
import { demoLayout, demoSetUp, demoStation } from '../../processing/synthetic/demo-scenario';

/** A whole server with a data folder of its own, for the tests of one file. */

export const PASSWORD = 'a long enough test password';

export interface Group {
  id: string;
  slug: string;
}

export interface Someone {
  id: string;
  email: string;
  cookie: string;
}

type Method = 'get' | 'post' | 'patch' | 'delete';

export class Bench {
  private constructor(
    readonly url: string,
    readonly deps: Deps,
    readonly database: Database,
    private readonly server: Server,
    private readonly queue: JobQueue,
    private readonly engine: Engine | null,
  ) {}

  /**
   * @param options.engine worker threads; without them jobs stay in the queue
   * @param options.config what differs from a default start
   */
  static async start(
    options: { engine?: Engine; config?: Partial<Config>; signInLimit?: number } = {},
  ): Promise<Bench> {
    const dataFolder = await mkdtemp(join(tmpdir(), 'gustbook-api-'));
    const config: Config = {
      ...readConfig({
        LOG_LEVEL: process.env.TEST_LOG ?? 'silent',
        GUSTBOOK_DEMO: '0',
        GUSTBOOK_DATA: dataFolder,
      }),
      ...options.config,
    };
    const database = await openEmbedded(dataFolder, join(projectRoot, '.gustbook', 'cache'));
    const storage = new ObjectStore(dataFolder);
    await storage.prepare();
    const log = createLog(config.logLevel);
    const queue = new JobQueue(database, log, 1);
    await queue.open();
    const server = createServer();
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
    const url = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
    const deps: Deps = {
      config,
      db: database.db,
      auth: createAuth({
        db: database.db,
        secret: 'x'.repeat(43),
        baseUrl: url,
        trustedOrigins: [url],
        sendMail: outbox(dataFolder),
        log,
      }),
      storage,
      events: new EventHub(),
      jobs: queue,
      log,
      startUp: { ready: true, progress: null, hasDemo: false },
      rateLimits: { general: 100_000, signIn: options.signInLimit ?? 100_000 },
      trustedOrigins: [url],
    };
    server.on('request', createApp(deps));
    const { engine = null } = options;
    if (engine !== null) {
      await queue.begin(
        {
          readRawFile: (id, isLastTry, signal) => readRawFile(deps, engine, id, isLastTry, signal),
          computeRun: (id, isLastTry, signal) => computeRun(deps, engine, id, isLastTry, signal),
        },
        { rawFileIds: [], runIds: [] },
      );
    }
    return new Bench(url, deps, database, server, queue, engine);
  }

  async close(): Promise<void> {
    this.deps.events.close();
    this.server.closeAllConnections();
    await new Promise((resolve) => this.server.close(resolve));
    await this.queue.close(5000);
    await this.engine?.close();
    await this.database.close();
    await rm(this.deps.config.dataFolder, { recursive: true, force: true });
  }

  async addGroup(slug: string): Promise<Group> {
    const group = { id: randomUUID(), slug, name: `Group ${slug}` };
    await addGroup(this.deps.db, group);
    return group;
  }

  /** A new person, signed in through the same route as everybody. */
  async addPerson(group: Group, role: Role): Promise<Someone> {
    const email = `${role}.${group.slug}.${randomUUID().slice(0, 8)}@example.org`;
    const id = await ensureAccount(this.deps.db, this.deps.auth, {
      name: `${role} of ${group.slug}`,
      email,
      password: PASSWORD,
      groupId: group.id,
      role,
    });
    return { id, email, cookie: await this.signIn(email, PASSWORD) };
  }

  async addOnePerRole(group: Group): Promise<Record<Role, Someone>> {
    const people = {} as Record<Role, Someone>;
    for (const role of roles) people[role] = await this.addPerson(group, role);
    return people;
  }

  async signIn(email: string, password: string): Promise<string> {
    const answer = await request(this.url)
      .post('/api/auth/sign-in/email')
      .set('origin', this.url)
      .send({ email, password })
      .expect(200);
    return [answer.get('set-cookie') ?? []]
      .flat()
      .map((cookie) => cookie.split(';')[0])
      .join('; ');
  }

  /** A request as a browser of this person sends it; null for nobody. */
  as(someone: Someone | null, method: Method, path: string): Test {
    const test = request(this.url)[method](path).set('origin', this.url);
    return someone === null ? test : test.set('cookie', someone.cookie);
  }

  /** Brings a file in as the client does. */
  upload(
    someone: Someone,
    path: string,
    file: { id?: string; layoutId: string; name: string; bytes: Buffer },
  ): Test {
    return this.as(someone, 'post', path)
      .field('id', file.id ?? randomUUID())
      .field('layoutId', file.layoutId)
      .attach('file', file.bytes, { filename: file.name, contentType: 'application/octet-stream' });
  }
}

// ------------------------------------------------------------------------------------------------------------ invented documents

export function station(slug: string): Station {
  return { ...demoStation, slug, name: `Station ${slug}` };
}

export function setUp(change: Partial<SetUp> = {}): SetUp {
  return { ...demoSetUp, sampleRateHz: 10, ...change };
}

export function layout(change: Partial<Layout> = {}): Layout {
  return { ...demoLayout(10), ...change };
}

export interface MadeStation {
  slug: string;
  id: string;
  systemId: string;
  setUpId: string;
  layoutId: string;
}

/** A station with a set-up and a layout, made by its routes. */
export async function makeStation(
  bench: Bench,
  group: Group,
  someone: Someone,
  slug: string,
  setUpChange: Partial<SetUp> = {},
): Promise<MadeStation> {
  const made = {
    slug,
    id: randomUUID(),
    systemId: randomUUID(),
    setUpId: randomUUID(),
    layoutId: randomUUID(),
  };
  const root = `/api/groups/${group.slug}/stations`;
  await bench
    .as(someone, 'post', root)
    .send({
      id: made.id,
      systemId: made.systemId,
      setUpId: made.setUpId,
      station: station(slug),
      setUp: setUp(setUpChange),
    })
    .expect(201);
  await bench
    .as(someone, 'post', `${root}/${slug}/layouts`)
    .send({ id: made.layoutId, layout: layout() })
    .expect(201);
  return made;
}
