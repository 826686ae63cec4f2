import { mkdtempSync, writeFileSync, mkdirSync, rmSync } from 'node:fs';
import { createServer, request, type IncomingHttpHeaders } from 'node:http';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { RimeholdError } from '../../src/errors.ts';
import { formatInstant, HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import { createWebServer, type WebServer } from '../../src/web/server.ts';
import type { NowAnswer, RecordColumns } from '../../src/web/source.ts';
import { createFakeSource, type FakeSource } from './fake-source.ts';
import { EVENING, NOW_MS, recordAt, recordsBetween } from './juniper-evening.ts';

const PASSPHRASE = 'melt water at noon';
const log = { info: () => {}, warn: () => {}, error: () => {} };

let dir: string;
let source: FakeSource;
let server: WebServer;
let port: number;

const options = () => ({
  host: '127.0.0.1',
  port: 0,
  pageDir: join(dir, 'web/page'),
  passphrase: null,
  source,
  log,
});

async function start(passphrase: string | null): Promise<void> {
  server = createWebServer({ ...options(), passphrase });
  ({ port } = await server.start());
}

beforeEach(async () => {
  dir = mkdtempSync(join(tmpdir(), 'rimehold-web-'));
  mkdirSync(join(dir, 'web/page'), { recursive: true });
  writeFileSync(join(dir, 'web/page/index.html'), '<!doctype html><title>page</title>');
  writeFileSync(join(dir, 'web/page/main.js'), 'export {};');
  for (const name of ['units.js', 'commands.js']) writeFileSync(join(dir, name), 'export {};');
  source = createFakeSource();
  await start(PASSPHRASE);
});

afterEach(async () => {
  await server.stop();
  rmSync(dir, { recursive: true, force: true });
});

const get = (path: string, headers: Record<string, string> = {}): Promise<Response> =>
  fetch(`http://127.0.0.1:${port}${path}`, { headers });

/** The JSON body of an answer. */
async function json<T>(answer: Response): Promise<T> {
  const value: unknown = await answer.json();
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- the test that follows looks at the parts
  return value as T;
}

const post = (path: string, body: unknown, headers: Record<string, string> = {}): Promise<Response> =>
  fetch(`http://127.0.0.1:${port}${path}`, {
    method: 'POST',
    headers: { 'content-type': 'application/json', origin: `http://127.0.0.1:${port}`, ...headers },
    body: JSON.stringify(body),
  });

async function signIn(): Promise<string> {
  const answer = await post('/api/session', { passphrase: PASSPHRASE });
  expect(answer.status).toBe(204);
  return (answer.headers.get('set-cookie') ?? '').split(';')[0];
}

/** `fetch` writes the Host header itself; this one sends what it is told. */
function getAsHost(host: string): Promise<{ status: number; headers: IncomingHttpHeaders }> {
  return new Promise((resolve, reject) => {
    request({ port, host: '127.0.0.1', path: '/api/now', headers: { host } }, (answer) => {
      answer.resume();
      resolve({ status: answer.statusCode ?? 0, headers: answer.headers });
    })
      .on('error', reject)
      .end();
  });
}

describe('reading', () => {
  it('answers /api/now with the very record, plan and points of the source', async () => {
    const now = await json<NowAnswer>(await get('/api/now'));
    const { zoneOffsets, access, ...view } = now;
    expect(view).toEqual(JSON.parse(JSON.stringify(source.now())));
    expect(access).toEqual({ changes: true, signedIn: false });
    // Madrid is two hours ahead in July; the last change before 14 July 2026 is 29 March, 01:00 UTC (EU directive 2000/84/EC).
    expect(zoneOffsets.at(-1)).toEqual({ fromMs: Date.UTC(2026, 2, 29, 1), offsetMs: 2 * HOUR_MS });
  });

  it('hands out records untouched, thinned without averaging, and by columns', async () => {
    const span = `from=${formatInstant(EVENING.startMs)}&to=${formatInstant(EVENING.startMs + HOUR_MS)}`;
    const all = await (await get(`/api/records?${span}`)).json();
    expect(all).toEqual(recordsBetween(EVENING.startMs, EVENING.startMs + HOUR_MS));
    const columns = await json<RecordColumns>(
      await get(`/api/records?${span}&every=PT15M&fields=atMs,iceOnHandKwh,nothing`),
    );
    expect(columns.fields).toEqual(['atMs', 'iceOnHandKwh', 'nothing']);
    expect(columns.rows.map(([atMs]) => (Number(atMs) - EVENING.startMs) / MINUTE_MS)).toEqual([
      14, 29, 44, 59, 60,
    ]);
    for (const [atMs, ice] of columns.rows) expect(ice).toBe(recordAt(Number(atMs)).iceOnHandKwh);
  });

  it.each([
    ['/api/records', 400],
    ['/api/records?from=yesterday&to=today', 400],
    ['/api/records?from=2026-07-14T12:00:00Z&to=2026-07-10T12:00:00Z', 400],
    ['/api/records?from=2026-07-01T12:00:00Z&to=2026-07-14T12:00:00Z', 400],
    ['/api/records?from=2026-07-14T10:00:00Z&to=2026-07-14T12:00:00Z&every=5min', 400],
    ['/api/nights?from=2026-07-14&to=2026-07-01', 400],
    ['/api/nights/2026-02-31', 404],
    ['/api/nights/2026-07-14', 404],
    ['/nights/2026-07-14', 404],
    ['/api/wish?name=cool-now&for=PT48H', 422],
    ['/../package.json', 404],
    ['/web/page/..%2f..%2funits.js', 404],
    ['/nowhere', 404],
  ])('refuses %s with %i as problem details (RFC 9457)', async (path, status) => {
    const answer = await get(path);
    expect(answer.status).toBe(status);
    expect(answer.headers.get('content-type')).toBe('application/problem+json');
    const body = await json<Record<string, unknown>>(answer);
    expect(body['status']).toBe(status);
    expect(body['type']).toBe('about:blank');
    expect(String(body['detail'])).toMatch(/\.$/);
  });

  it('serves nights as ledger, sheet, CSV and printable page', async () => {
    const nights = await json<{ rows: unknown[] }>(await get('/api/nights?from=2026-07-01'));
    expect(nights.rows).toEqual(source.nights('2026-07-01', '9999-12-31').rows);
    expect(await (await get('/api/nights/2026-07-13')).json()).toEqual(source.night('2026-07-13'));
    const csv = await get('/api/nights.csv');
    expect(csv.headers.get('content-type')).toBe('text/csv; charset=utf-8; header=present');
    const sheet = await get('/nights/2026-07-13');
    expect(sheet.headers.get('content-security-policy')).toContain("default-src 'none'");
    expect(sheet.headers.get('content-security-policy')).not.toContain('script-src');
  });

  it('serves the page with a strict policy, answers 304, and allows no other origin', async () => {
    const page = await get('/');
    const policy = page.headers.get('content-security-policy') ?? '';
    expect(policy).toContain("script-src 'self'");
    expect(policy).not.toMatch(/unsafe|\*|http/);
    expect(page.headers.get('x-content-type-options')).toBe('nosniff');
    const again = await get('/', { 'if-none-match': page.headers.get('etag') ?? '' });
    expect(again.status).toBe(304);
    const foreign = await get('/api/now', { origin: 'http://elsewhere.example' });
    expect(foreign.headers.get('access-control-allow-origin')).toBeNull();
  });

  it('answers to addresses and local names only, against DNS rebinding', async () => {
    expect((await getAsHost(`127.0.0.1:${port}`)).status).toBe(200);
    expect((await getAsHost('[::1]:8377')).status).toBe(200);
    expect((await getAsHost('hut:8377')).status).toBe(200);
    expect((await getAsHost('hut.local')).status).toBe(200);
    const foreign = await getAsHost('rebound.example:8377');
    expect(foreign.status).toBe(421);
    expect(foreign.headers['content-type']).toBe('application/problem+json');
  });

  it('tells its health: pass, warn on a lost broker, fail when the loop stands still', async () => {
    expect(await (await get('/health')).json()).toMatchObject({ status: 'pass' });
    source.show('broker-away');
    const warned = await get('/health');
    expect([warned.status, (await json<{ status: string }>(warned)).status]).toEqual([200, 'warn']);
    source.show('evening');
    const view = source.now();
    source.now = () => ({ ...view, record: recordAt(NOW_MS - HOUR_MS) });
    expect((await get('/health')).status).toBe(503);
  });
});

describe('changing', () => {
  it('takes a wish from a signed-in owner, shows it, and gives it back', async () => {
    const cookie = await signIn();
    const set = await post('/api/wish', { name: 'cool-now', for: 'PT1H' }, { cookie });
    expect(await set.json()).toEqual({ name: 'cool-now', untilMs: NOW_MS + HOUR_MS });
    const now = await json<NowAnswer>(await get('/api/now', { cookie }));
    expect(now.wish.name).toBe('cool-now');
    expect(now.access.signedIn).toBe(true);
    expect((await post('/api/wish', { name: 'none' }, { cookie })).status).toBe(200);
    expect(source.changes).toEqual([`wish cool-now ${HOUR_MS}`, 'wish none 0']);
  });

  it('takes strategy and limit, once with HTTP Basic and no session', async () => {
    const authorization = `Basic ${Buffer.from(`owner:${PASSPHRASE}`).toString('base64')}`;
    expect((await post('/api/strategy', { strategy: 'timetable' }, { authorization })).status).toBe(200);
    expect((await post('/api/limit', { limitC: 25.5 }, { authorization })).status).toBe(200);
    const moved = { what: 'probe-moved', point: 'leaving-water' };
    expect((await post('/api/told', moved, { authorization })).status).toBe(200);
    expect((await post('/api/told', { what: 'nothing' }, { authorization })).status).toBe(200);
    expect(source.changes).toEqual([
      'strategy timetable',
      'limit 25.5',
      'told probe-moved leaving-water',
      'told nothing',
    ]);
  });

  it.each([
    ['/api/wish', { name: 'melt-all', for: 'PT1H' }],
    ['/api/wish', { name: 'cool-now' }],
    ['/api/wish', { name: 'cool-now', for: 'PT25H' }],
    ['/api/strategy', { strategy: 'guess' }],
    ['/api/limit', { limitC: 45 }],
    ['/api/told', { what: 'melted' }],
    ['/api/told', { what: 'probe-moved', point: 'nose' }],
    ['/api/limit', { limitC: 25, also: 1 }],
  ])('refuses %s with a body that it does not know, and says where', async (path, body) => {
    const cookie = await signIn();
    const answer = await post(path, body, { cookie });
    expect(answer.status).toBe(422);
    const { errors } = await json<{ errors: { pointer: string }[] }>(answer);
    expect(errors[0].pointer).toMatch(/^#\//);
    expect(source.changes).toEqual([]);
  });

  it('changes nothing without the passphrase, from another origin, or with a form', async () => {
    const body = { name: 'stand-down', for: 'PT1H' };
    const cookie = await signIn();
    const foreign = { cookie, origin: 'http://elsewhere.example' };
    expect((await post('/api/wish', body)).status).toBe(401);
    expect((await post('/api/wish', body, { cookie: 'rimehold-session=guess' })).status).toBe(401);
    expect((await post('/api/wish', body, foreign)).status).toBe(403);
    expect((await post('/api/wish', body, { cookie, 'sec-fetch-site': 'cross-site' })).status).toBe(403);
    expect((await post('/api/wish', body, { cookie, 'content-type': 'text/plain' })).status).toBe(415);
    const long = { name: 'stand-down', for: 'PT1H', also: 'x'.repeat(5000) };
    expect((await post('/api/wish', long, { cookie })).status).toBe(413);
    expect(source.changes).toEqual([]);
  });

  it('slows down guessing after five wrong passphrases, also for the right one', async () => {
    for (let i = 0; i < 5; i += 1) {
      expect((await post('/api/session', { passphrase: `guess ${i}` })).status).toBe(401);
    }
    const braked = await post('/api/session', { passphrase: PASSPHRASE });
    expect(braked.status).toBe(429);
    expect(Number(braked.headers.get('retry-after'))).toBeGreaterThan(0);
  });

  it('hides the session from scripts and other sites, and signs out', async () => {
    const answer = await post('/api/session', { passphrase: PASSPHRASE });
    const cookie = answer.headers.get('set-cookie') ?? '';
    expect(cookie).toMatch(/HttpOnly/);
    expect(cookie).toMatch(/SameSite=Strict/);
    expect(cookie).not.toContain(PASSPHRASE);
    const headers = { cookie: cookie.split(';')[0], origin: `http://127.0.0.1:${port}` };
    const out = await fetch(`http://127.0.0.1:${port}/api/session`, { method: 'DELETE', headers });
    expect(out.status).toBe(204);
    expect((await post('/api/wish', { name: 'none' }, { cookie: headers.cookie })).status).toBe(401);
  });

  it('only shows where no passphrase is set', async () => {
    await server.stop();
    await start(null);
    const answer = await post('/api/session', { passphrase: '' });
    expect(answer.status).toBe(403);
    expect((await json<{ detail: string }>(answer)).detail).toContain('passphrase-file');
  });
});

describe('starting and stopping', () => {
  it('names a port that is taken', async () => {
    const other = createServer().listen(0, '127.0.0.1');
    await new Promise((resolve) => other.once('listening', resolve));
    const address = other.address();
    const taken = address !== null && typeof address === 'object' ? address.port : 0;
    const second = createWebServer({ ...options(), port: taken });
    await expect(second.start()).rejects.toMatchObject({ name: 'RimeholdError', code: 'port-in-use' });
    await second.stop();
    other.close();
  });

  it('says in plain words that an address is not of this machine', async () => {
    // 192.0.2.1 is in TEST-NET-1 (RFC 5737): no machine has it.
    const elsewhere = createWebServer({ ...options(), host: '192.0.2.1' });
    await expect(elsewhere.start()).rejects.toMatchObject({
      code: 'config',
      message: expect.stringMatching(/192\.0\.2\.1:0.*does not have that address; set web\.host/),
    });
    await elsewhere.stop();
  });

  it('says that the page is not built', async () => {
    const unbuilt = createWebServer({ ...options(), pageDir: dir });
    await expect(unbuilt.start()).rejects.toThrow(RimeholdError);
  });

  it('ends open event streams and lets go of the source when it stops', async () => {
    const stream = await get('/events');
    const ended = stream.text();
    await server.stop();
    expect(await ended).toContain('event: record');
    expect(source.listeners()).toBe(0);
  });
});
