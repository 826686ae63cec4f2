/** What only the owner may do: same origin, then the passphrase (a session, or once with the change), then the change. */
import { getConnInfo } from '@hono/node-server/conninfo';
import type { Context, Hono } from 'hono';
import { getCookie, setCookie } from 'hono/cookie';
import * as z from 'zod';
import { STRATEGIES, TOLD, WISHES } from '../commands.ts';
import { RimeholdError } from '../errors.ts';
import { isPointId, type PointId } from '../points.ts';
import { formatInstant, parseDuration, DAY_MS, MINUTE_MS } from '../time.ts';
import { SESSION_SECONDS, createFailureBrake, createPassphraseCheck, createSessions } from './access.ts';
import { jsonBody, notUnderstood } from './json-body.ts';
import { isSameOrigin } from './origin.ts';
import { problem } from './problem.ts';
import type { Access, WebLog, WebSource } from './source.ts';

export const SESSION_COOKIE = 'rimehold-session';
const LONGEST_WISH_MS = DAY_MS;

const wishDuration = z.string().transform((text, ctx): number => {
  const ms = parseDuration(text);
  if (ms !== null && ms >= MINUTE_MS && ms <= LONGEST_WISH_MS) return ms;
  ctx.addIssue({ code: 'custom', message: `expected a duration between PT1M and PT24H, found "${text}"` });
  return z.NEVER;
});
const wishBody = z.union([
  z.strictObject({ name: z.literal('none') }),
  z.strictObject({ name: z.enum(WISHES), for: wishDuration }),
]);
const previewQuery = z.strictObject({ name: z.enum(WISHES), for: wishDuration });
const pointName = z.custom<PointId>(
  (value) => typeof value === 'string' && isPointId(value),
  'expected the name of a point',
);
const toldBody = z.union([
  z.strictObject({ what: z.literal('nothing') }),
  z.strictObject({ what: z.enum(TOLD), point: pointName.optional() }),
]);
const strategyBody = z.strictObject({ strategy: z.enum(STRATEGIES) });
/** The range of `comfort.limit` in the site file. */
const limitBody = z.strictObject({ limitC: z.number().min(18).max(32) });
const passphraseBody = z.strictObject({ passphrase: z.string().max(1024) });

export interface ChangeParts {
  readonly source: WebSource;
  readonly passphrase: string | null;
  readonly log: WebLog;
  /** Monotonic time, for sessions and the brake. */
  readonly nowMs: () => number;
}

/** Adds the routes and returns what a viewer with a given cookie may do. */
export function addChangeRoutes(app: Hono, parts: ChangeParts): (cookieHeader: string | undefined) => Access {
  const { source, log } = parts;
  const gate = createGate(parts);
  app.post('/api/session', (c) => gate.signIn(c));
  app.delete('/api/session', (c) => gate.signOut(c));
  app.get('/api/wish', (c) => {
    const asked = previewQuery.safeParse(c.req.query());
    return asked.success
      ? c.json(source.wishPreview(asked.data.name, asked.data.for))
      : notUnderstood(asked.error);
  });
  app.post('/api/wish', (c) =>
    gate.change(c, wishBody, (body) => {
      const wish = source.setWish(body.name, 'for' in body ? body.for : 0);
      log.info({ wish: wish.name, until: formatInstant(wish.untilMs) }, 'The owner set a wish on the page.');
      return wish;
    }),
  );
  app.post('/api/told', (c) =>
    gate.change(c, toldBody, (body) => {
      if (body.what === 'nothing') source.takeBack();
      else source.tell(body.what, body.point ?? null);
      return { what: body.what };
    }),
  );
  app.post('/api/strategy', (c) =>
    gate.change(c, strategyBody, ({ strategy }) => {
      source.setStrategy(strategy);
      log.info({ strategy }, 'The owner set the strategy on the page.');
      return { strategy };
    }),
  );
  app.post('/api/limit', (c) =>
    gate.change(c, limitBody, ({ limitC }) => {
      source.setLimit(limitC);
      log.info({ limitC }, 'The owner set the comfort limit on the page.');
      return { limitC };
    }),
  );
  return gate.accessOf;
}

interface Gate {
  signIn(c: Context): Promise<Response>;
  signOut(c: Context): Response;
  change<T>(c: Context, type: z.ZodType<T>, act: (body: T) => object): Promise<Response>;
  readonly accessOf: (cookieHeader: string | undefined) => Access;
}

function createGate({ passphrase, log, nowMs }: ChangeParts): Gate {
  const isPassphrase = passphrase === null ? null : createPassphraseCheck(passphrase);
  const sessions = createSessions();
  const brake = createFailureBrake();

  /** Null when the passphrase is right; each wrong one slows the caller down. */
  const refusePassphrase = (c: Context, offered: string): Response | null => {
    const caller = getConnInfo(c).remote.address ?? 'unknown';
    const waitMs = brake.waitMs(caller, nowMs());
    if (waitMs > 0) return tooMany(waitMs);
    if (isPassphrase?.(offered)) {
      brake.succeeded(caller);
      return null;
    }
    brake.failed(caller, nowMs());
    log.warn({ caller }, 'A wrong passphrase was given on the page.');
    return problem(401, 'That is not the passphrase.');
  };
  const refuseOrigin = (c: Context): Response | null => {
    if (isPassphrase === null) return problem(403, NO_PASSPHRASE);
    return isSameOrigin(originOf(c), getCookie(c, SESSION_COOKIE) !== undefined)
      ? null
      : problem(403, FOREIGN);
  };
  const refuse = (c: Context): Response | null => {
    const refused = refuseOrigin(c);
    if (refused || sessions.holds(getCookie(c, SESSION_COOKIE), nowMs())) return refused;
    const offered = basicPassword(c.req.header('authorization'));
    return offered === null
      ? problem(401, 'Sign in with the passphrase first.')
      : refusePassphrase(c, offered);
  };
  return {
    async signIn(c) {
      const foreign = refuseOrigin(c);
      if (foreign) return foreign;
      const body = await jsonBody(c.req.raw, passphraseBody);
      if (!body.ok) return body.refusal;
      const wrong = refusePassphrase(c, body.value.passphrase);
      if (wrong) return wrong;
      setCookie(c, SESSION_COOKIE, sessions.open(nowMs()), COOKIE);
      return c.body(null, 204);
    },
    signOut(c) {
      const refused = refuseOrigin(c);
      if (refused) return refused;
      sessions.close(getCookie(c, SESSION_COOKIE));
      setCookie(c, SESSION_COOKIE, '', { ...COOKIE, maxAge: 0 });
      return c.body(null, 204);
    },
    async change(c, type, act) {
      const refused = refuse(c);
      if (refused) return refused;
      const body = await jsonBody(c.req.raw, type);
      return body.ok ? carriedOut(c, () => act(body.value)) : body.refusal;
    },
    accessOf: (cookieHeader) => ({
      changes: isPassphrase !== null,
      signedIn: sessions.holds(cookieIn(cookieHeader), nowMs()),
    }),
  };
}

/** No `secure`: the page is served over plain HTTP inside the house. */
const COOKIE = { httpOnly: true, sameSite: 'Strict', path: '/', maxAge: SESSION_SECONDS } as const;
const NO_PASSPHRASE = 'This page only shows: set web.passphrase-file in the site file to allow changes.';
const FOREIGN = 'Changes are taken from the page itself only, not from another site.';

function tooMany(waitMs: number): Response {
  const seconds = Math.ceil(waitMs / 1000);
  const headers = { 'retry-after': String(seconds) };
  return problem(429, `Too many wrong passphrases; try again in ${seconds} s.`, { headers });
}

function originOf(c: Context): {
  origin: string | undefined;
  fetchSite: string | undefined;
  host: string | undefined;
} {
  return {
    origin: c.req.header('origin'),
    fetchSite: c.req.header('sec-fetch-site'),
    host: c.req.header('host'),
  };
}

function cookieIn(header: string | undefined): string | undefined {
  const pairs = (header ?? '').split(/;\s*/).map((pair) => pair.split('='));
  return pairs.find(([name]) => name === SESSION_COOKIE)?.[1];
}

/** The password of HTTP Basic authentication (RFC 7617), for programs that change one thing and leave. */
function basicPassword(header: string | undefined): string | null {
  const match = /^Basic ([A-Za-z0-9+/=]+)$/i.exec(header ?? '');
  const pair = match ? Buffer.from(match[1], 'base64').toString('utf8') : '';
  return pair.includes(':') ? pair.slice(pair.indexOf(':') + 1) : null;
}

function carriedOut(c: Context, act: () => object): Response {
  try {
    return c.json(act());
  } catch (error) {
    if (error instanceof RimeholdError && error.code === 'usage') return problem(409, error.message);
    throw error;
  }
}
