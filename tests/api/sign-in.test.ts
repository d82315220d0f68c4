import { readFile, readdir } from 'node:fs/promises';
import { join } from 'node:path';
import request from 'supertest';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openAuthRoutes } from '../../server/auth/open-routes';
import { DEMO_DOMAIN } from '../../server/auth/demo-accounts';
import { ensureAccount } from '../../server/auth/accounts';
import { errorEnvelopeSchema } from '../../server/contract/errors';
import { healthSchema, meSchema } from '../../server/contract/api';
import { Bench, PASSWORD } from './bench';
import type { Group, Someone } from './bench';

let bench: Bench;
let group: Group;
let lead: Someone;

beforeAll(async () => {
  bench = await Bench.start();
  group = await bench.addGroup('reedmoor');
  lead = await bench.addPerson(group, 'lead');
});
afterAll(() => bench.close());

describe('signing in', () => {
  it('opens a session with the right password and refuses a wrong one', async () => {
    await bench.as(null, 'get', '/api/me').expect(401);
    const cookie = await bench.signIn(lead.email, PASSWORD);
    const me = await request(bench.url).get('/api/me').set('cookie', cookie).expect(200);
    expect(meSchema.parse(me.body)).toMatchObject({
      user: { email: lead.email },
      groups: [{ slug: 'reedmoor', role: 'lead' }],
    });
    await request(bench.url)
      .post('/api/auth/sign-in/email')
      .set('origin', bench.url)
      .send({ email: lead.email, password: 'not the password at all' })
      .expect(401);
  });

  it('refuses a sign-in sent from a page of another address', async () => {
    const body = { email: lead.email, password: PASSWORD };
    await request(bench.url).post('/api/auth/sign-in/email').set('origin', bench.url).send(body).expect(200);
    await request(bench.url)
      .post('/api/auth/sign-in/email')
      .set('origin', 'http://elsewhere.example')
      .set('cookie', lead.cookie)
      .send(body)
      .expect(403);
  });

  it('takes nobody in who was not invited', async () => {
    const answer = await request(bench.url)
      .post('/api/auth/sign-up/email')
      .set('origin', bench.url)
      .send({ email: 'stranger@example.org', password: PASSWORD, name: 'Stranger' });
    expect(answer.status).toBe(404);
    await request(bench.url)
      .post('/api/auth/sign-in/email')
      .set('origin', bench.url)
      .send({ email: 'stranger@example.org', password: PASSWORD })
      .expect(401);
  });

  it('ends the session when signing out', async () => {
    const someone = await bench.addPerson(group, 'student');
    await bench.as(someone, 'get', '/api/me').expect(200);
    await bench.as(someone, 'post', '/api/auth/sign-out').send({}).expect(200);
    await bench.as(someone, 'get', '/api/me').expect(401);
  });

  it('lets a person choose a new password by the link in the outbox', async () => {
    const someone = await bench.addPerson(group, 'technician');
    await bench
      .as(null, 'post', '/api/auth/request-password-reset')
      .send({ email: someone.email, redirectTo: '/' })
      .expect(200);
    const folder = join(bench.deps.config.dataFolder, 'outbox');
    const texts = await Promise.all(
      (await readdir(folder)).map((name) => readFile(join(folder, name), 'utf8')),
    );
    const mail = texts.find((text) => text.includes(`To: ${someone.email}`));
    const token = /\/reset-password\/([A-Za-z0-9_-]+)/.exec(mail ?? '')?.[1];
    const newPassword = 'another long test password';
    await bench.as(null, 'post', '/api/auth/reset-password').send({ token, newPassword }).expect(200);
    await bench.signIn(someone.email, newPassword);
    await bench
      .as(null, 'post', '/api/auth/sign-in/email')
      .send({ email: someone.email, password: PASSWORD })
      .expect(401);
    // Sessions opened with the old password are over.
    await bench.as(someone, 'get', '/api/me').expect(401);
  });
});

describe('the routes of the sign-in library', () => {
  it('are closed but for the listed ones', async () => {
    const { api } = bench.deps.auth;
    const own = Object.values(api).flatMap((endpoint) => {
      const { path, options } = endpoint as { path?: string; options?: { method?: string | string[] } };
      return path === undefined ? [] : [options?.method ?? 'GET'].flat().map((method) => ({ method, path }));
    });
    // The library and its two plugins bring several dozen routes.
    expect(own.length).toBeGreaterThan(40);
    expect(own.filter(({ path }) => path.startsWith('/organization/')).length).toBeGreaterThan(15);
    expect(own.filter(({ path }) => path.startsWith('/api-key/')).length).toBeGreaterThan(3);
    const open: string[] = [];
    for (const { method, path } of own) {
      if (method === '*') continue;
      const address = path.replace(/:[A-Za-z]+/g, 'token');
      const isListed = openAuthRoutes.some((route) => route.method === method && route.path.test(address));
      if (isListed) {
        open.push(`${method} ${path}`);
        continue;
      }
      const answer = await bench
        .as(lead, method.toLowerCase() as 'get', `/api/auth${address}`)
        .send(method === 'GET' ? undefined : {});
      expect([method, path, answer.status]).toEqual([method, path, 404]);
      expect(errorEnvelopeSchema.parse(answer.body).error.code).toBe('not_found');
    }
    expect(open.sort()).toEqual([
      'GET /get-session',
      'GET /reset-password/:token',
      'POST /change-password',
      'POST /request-password-reset',
      'POST /reset-password',
      'POST /sign-in/email',
      'POST /sign-out',
    ]);
  });

  it('stay closed however the address is written', async () => {
    for (const address of [
      '/api/auth/organization/create/',
      '/api/auth//organization/create',
      '/api/auth/sign-in/email/../../organization/create',
      '/api/auth/%6frganization/create',
      '/API/AUTH/organization/create',
    ]) {
      const answer = await bench.as(lead, 'post', address).send({ name: 'Mine', slug: 'mine' });
      expect([address, answer.status]).toEqual([address, 404]);
    }
    const me = await bench.as(lead, 'get', '/api/me').expect(200);
    expect((me.body as { groups: unknown[] }).groups).toHaveLength(1);
  });
});

describe('API keys', () => {
  it('act for their owner, and a wrong or disabled one for nobody', async () => {
    const { key, id } = await bench.deps.auth.api.createApiKey({ body: { name: 'logger', userId: lead.id } });
    const me = await request(bench.url).get('/api/me').set('x-api-key', key).expect(200);
    expect((me.body as { user: { id: string } }).user.id).toBe(lead.id);
    await request(bench.url).get('/api/groups/reedmoor/stations').set('x-api-key', key).expect(200);
    await request(bench.url)
      .get('/api/me')
      .set('x-api-key', `${key.slice(0, -1)}!`)
      .expect(401);
    await bench.deps.auth.api.updateApiKey({ body: { keyId: id, userId: lead.id, enabled: false } });
    await request(bench.url).get('/api/me').set('x-api-key', key).expect(401);
  });
});

describe('demonstration accounts', () => {
  const email = `somebody${DEMO_DOMAIN}`;

  it('work on this machine and not through a proxy', async () => {
    await ensureAccount(bench.deps.db, bench.deps.auth, {
      name: 'Somebody',
      email,
      password: PASSWORD,
      groupId: group.id,
      role: 'student',
    });
    const cookie = await bench.signIn(email, PASSWORD);
    await request(bench.url).get('/api/me').set('cookie', cookie).expect(200);
    await request(bench.url)
      .get('/api/me')
      .set('cookie', cookie)
      .set('x-forwarded-for', '192.0.2.7')
      .expect(401);
    await request(bench.url)
      .post('/api/auth/sign-in/email')
      .set('origin', bench.url)
      .set('x-forwarded-for', '192.0.2.7')
      .set('x-gustbook-loopback', '1')
      .send({ email, password: PASSWORD })
      .expect(403);
  });

  it('are told by the health route on loopback only', async () => {
    const without = await request(bench.url).get('/api/health').expect(200);
    expect(healthSchema.parse(without.body).demo).toBeNull();
    bench.deps.startUp.hasDemo = true;
    const here = await request(bench.url).get('/api/health').expect(200);
    expect(healthSchema.parse(here.body).demo?.signIns.map((one) => one.role)).toEqual([
      'lead',
      'analyst',
      'technician',
      'student',
    ]);
    const there = await request(bench.url).get('/api/health').set('x-forwarded-for', '192.0.2.7').expect(200);
    expect(healthSchema.parse(there.body).demo).toBeNull();
    bench.deps.startUp.hasDemo = false;
  });
});

describe('changes sent with a cookie', () => {
  it('are refused from a foreign page and taken from our own', async () => {
    const recipe = { recipe: { name: 'x' } };
    const foreign = await request(bench.url)
      .post('/api/groups/reedmoor/recipes')
      .set('cookie', lead.cookie)
      .set('origin', 'http://elsewhere.example')
      .send(recipe);
    expect([foreign.status, errorEnvelopeSchema.parse(foreign.body).error.code]).toEqual([
      403,
      'not_allowed',
    ]);
    await request(bench.url)
      .post('/api/groups/reedmoor/recipes')
      .set('cookie', lead.cookie)
      .set('sec-fetch-site', 'cross-site')
      .send(recipe)
      .expect(403);
    const own = await bench.as(lead, 'post', '/api/groups/reedmoor/recipes').send(recipe);
    expect([own.status, errorEnvelopeSchema.parse(own.body).error.code]).toEqual([400, 'invalid_input']);
  });
});

describe('too many requests', () => {
  it('are answered with 429 and our envelope', async () => {
    const strict = await Bench.start({ signInLimit: 3 });
    const attempt = () =>
      strict
        .as(null, 'post', '/api/auth/sign-in/email')
        .send({ email: 'nobody@example.org', password: PASSWORD });
    for (let k = 0; k < 3; k++) await attempt().expect(401);
    const refused = await attempt();
    expect([refused.status, errorEnvelopeSchema.parse(refused.body).error.code]).toEqual([
      429,
      'too_many_requests',
    ]);
    await strict.close();
  });
});

describe('what surrounds every answer', () => {
  it('names the request, forbids foreign scripts and hides the framework', async () => {
    const answer = await request(bench.url).get('/api/nothing-here').expect(404);
    const { error } = errorEnvelopeSchema.parse(answer.body);
    expect(error.code).toBe('not_found');
    expect(error.requestId).toBe(answer.get('x-request-id'));
    expect(answer.get('content-security-policy')).toContain("script-src 'self' 'wasm-unsafe-eval';");
    expect(answer.get('content-security-policy')).not.toContain('upgrade-insecure-requests');
    expect(answer.get('x-powered-by')).toBeUndefined();
    expect(answer.get('cache-control')).toBe('no-store');
  });

  it('answers malformed JSON with invalid_input', async () => {
    const answer = await bench
      .as(lead, 'post', '/api/groups/reedmoor/recipes')
      .set('content-type', 'application/json')
      .send('{"recipe":');
    expect([answer.status, errorEnvelopeSchema.parse(answer.body).error.code]).toEqual([
      400,
      'invalid_input',
    ]);
  });
});
