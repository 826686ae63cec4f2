/** The page's server: own files, programming interface, events, metrics. It listens where it is told and calls nobody. */
import { createServer, type Server } from 'node:http';
import { getRequestListener } from '@hono/node-server';
import { Hono } from 'hono';
import { compress } from 'hono/compress';
import { RimeholdError, sentenceOf } from '../errors.ts';
import { assetResponse, readAssets, type Asset } from './assets.ts';
import { addChangeRoutes } from './change-routes.ts';
import { createEventStreams, type EventStreams } from './events.ts';
import { isOwnHost } from './origin.ts';
import { problem } from './problem.ts';
import { addReadRoutes } from './read-routes.ts';
import type { WebLog, WebSource } from './source.ts';

export interface WebServerOptions {
  readonly host: string;
  /** 0 takes any free one. */
  readonly port: number;
  /** Folder of the compiled page, `dist/web/page`. */
  readonly pageDir: string;
  /** Null: the page only shows. */
  readonly passphrase: string | null;
  readonly source: WebSource;
  readonly log: WebLog;
  /** Names of this machine beyond addresses, bare names and local ones. */
  readonly ownNames?: readonly string[];
}

export interface WebServer {
  /** Throws `port-in-use` when another program has the port, `file-unreadable` when the page is not built. */
  start(): Promise<{ port: number }>;
  stop(): Promise<void>;
}

/** No inline script, no inline style, nothing from elsewhere; the night sheet is framed from our own origin. */
const PAGE_POLICY = [
  "default-src 'none'",
  "script-src 'self'",
  "style-src 'self'",
  "img-src 'self'",
  "connect-src 'self'",
  "frame-src 'self'",
  "base-uri 'none'",
  "form-action 'self'",
  "frame-ancestors 'none'",
].join('; ');

const SECURE_HEADERS: Readonly<Record<string, string>> = {
  'content-security-policy': PAGE_POLICY,
  'x-content-type-options': 'nosniff',
  'x-frame-options': 'DENY',
  'referrer-policy': 'no-referrer',
  'cross-origin-opener-policy': 'same-origin',
  'cross-origin-resource-policy': 'same-origin',
  'permissions-policy': 'camera=(), geolocation=(), microphone=(), payment=(), usb=()',
};

export function createWebServer(options: WebServerOptions): WebServer {
  let running: { server: Server; streams: EventStreams; unsubscribe: () => void } | null = null;
  return {
    async start() {
      const assets = readAssets(options.pageDir);
      const streams = createEventStreams(options.source);
      let records = 0;
      const unsubscribe = options.source.subscribe((event) => {
        if (event.kind === 'record') records += 1;
      });
      const app = buildApp(options, assets, streams, () => records);
      const server = createServer(getRequestListener(app.fetch, { overrideGlobalObjects: false }));
      running = { server, streams, unsubscribe };
      return { port: await listen(server, options) };
    },
    async stop() {
      if (!running) return;
      const { server, streams, unsubscribe } = running;
      running = null;
      unsubscribe();
      streams.closeAll();
      if (!server.listening) return;
      await closed(server);
    },
  };
}

function buildApp(
  options: WebServerOptions,
  assets: ReadonlyMap<string, Asset>,
  streams: EventStreams,
  recordsSinceStart: () => number,
): Hono {
  const { source, log } = options;
  const app = new Hono();
  app.use(async (c, next) => {
    if (!isOwnHost(c.req.header('host'), options.ownNames ?? [])) {
      c.res = problem(421, 'Open the page by the address of this machine, or by a name that ends in .local.');
    } else await next();
    for (const [name, value] of Object.entries(SECURE_HEADERS)) {
      if (!c.res.headers.has(name)) c.res.headers.set(name, value);
    }
  });
  // Event streams are left alone by their content type.
  app.use(compress());
  const accessOf = addChangeRoutes(app, {
    source,
    passphrase: options.passphrase,
    log,
    nowMs: () => performance.now(),
  });
  addReadRoutes(app, { source, accessOf, recordsSinceStart });
  app.get(
    '/events',
    () => streams.open() ?? problem(503, 'Too many pages are open; close one and try again.'),
  );
  app.get('*', (c, next) => {
    const asset = assets.get(c.req.path);
    return asset ? Promise.resolve(assetResponse(asset, c.req.header('if-none-match'))) : next();
  });
  app.notFound((c) => problem(404, `There is nothing at ${c.req.path}; start at the page itself, /.`));
  app.onError((error, c) => {
    log.error({ path: c.req.path, error: sentenceOf(error) }, 'A request failed.');
    return problem(500, 'The request failed inside rimehold; the log says why.');
  });
  return app;
}

/** Answers under way may end; what is still open after this is cut. */
const GRACE_MS = 500;

function closed(server: Server): Promise<void> {
  return new Promise((resolve) => {
    const cut = setTimeout(() => server.closeAllConnections(), GRACE_MS);
    server.close(() => {
      clearTimeout(cut);
      resolve();
    });
    server.closeIdleConnections();
  });
}

function listen(server: Server, { host, port }: WebServerOptions): Promise<number> {
  return new Promise((resolve, reject) => {
    server.once('error', (error: NodeJS.ErrnoException) => reject(listenError(error, host, port)));
    server.listen(port, host, () => {
      const address = server.address();
      resolve(address !== null && typeof address === 'object' ? address.port : port);
    });
  });
}

/** An address as it stands in a URL. */
export const hostInUrl = (host: string): string => (host.includes(':') ? `[${host}]` : host);

/** Why the system refused to listen, in plain words. */
const LISTEN_WORDS: Readonly<Record<string, string>> = {
  EADDRNOTAVAIL: 'that this machine does not have that address',
  ENOTFOUND: 'that no machine is known by that name',
  EAI_AGAIN: 'that the name cannot be looked up now',
  EACCES: 'that this user may not take that port (below 1024 it needs rights)',
  EINVAL: 'that this is no address to listen at',
};

function listenError(error: NodeJS.ErrnoException, host: string, port: number): Error {
  const where = `${hostInUrl(host)}:${port}`;
  if (error.code === 'EADDRINUSE') {
    const sentence = `Expected port ${port} to be free for the page, found another program at ${where}; set web.port.`;
    return new RimeholdError('port-in-use', sentence, { host, port }, { cause: error });
  }
  const found = LISTEN_WORDS[error.code ?? ''] ?? `that the system refuses (${error.code ?? error.message})`;
  const sentence = `Expected to serve the page at ${where}, found ${found}; set web.host to 127.0.0.1 for this machine alone or 0.0.0.0 for the house, and web.port to a free one.`;
  return new RimeholdError('config', sentence, { host, port }, { cause: error });
}
