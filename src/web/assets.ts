/** The page's own files, read once at start: a handful of small texts, served from memory. */
import { createHash } from 'node:crypto';
import { existsSync, readFileSync, readdirSync } from 'node:fs';
import { extname, join, resolve } from 'node:path';
import { RimeholdError } from '../errors.ts';

export interface Asset {
  readonly body: Buffer<ArrayBuffer>;
  readonly type: string;
  readonly etag: string;
  /** Link header, for the page itself. */
  readonly link: string | null;
}

const TYPES: Readonly<Record<string, string>> = {
  '.html': 'text/html; charset=utf-8',
  '.css': 'text/css; charset=utf-8',
  '.js': 'text/javascript; charset=utf-8',
  '.svg': 'image/svg+xml',
};

/** Vocabulary that page and daemon share; it is compiled beside the page's room and has no imports of its own. */
const SHARED = ['units.js', 'commands.js'];

/**
 * Every file by the path it is served at. The folder layout of the build is kept (`/web/page/main.js`, `/units.js`)
 * so that the compiled imports hold in the browser as they stand.
 */
export function readAssets(pageDir: string): ReadonlyMap<string, Asset> {
  if (!existsSync(join(pageDir, 'index.html'))) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected the page's files with index.html in ${resolve(pageDir)}, found none; run "npm run build".`,
      { pageDir },
    );
  }
  const assets = new Map<string, Asset>();
  for (const name of readdirSync(pageDir)) {
    if (extname(name) in TYPES) assets.set(`/web/page/${name}`, readAsset(join(pageDir, name)));
  }
  for (const name of SHARED) assets.set(`/${name}`, readAsset(join(pageDir, '..', '..', name)));
  const index = assets.get('/web/page/index.html');
  if (index) assets.set('/', { ...index, link: preloads(assets) });
  return assets;
}

function readAsset(file: string): Asset {
  const body = readFileSync(file);
  const etag = `"${createHash('sha256').update(body).digest('base64url').slice(0, 22)}"`;
  return { body, type: TYPES[extname(file)], etag, link: null };
}

/** Names every script of the page ahead (RFC 8288), so that a phone fetches them at once and not one behind another. */
function preloads(assets: ReadonlyMap<string, Asset>): string {
  const scripts = [...assets.keys()].filter((path) => path.endsWith('.js'));
  return scripts.map((path) => `<${path}>; rel=modulepreload`).join(', ');
}

/** Answers with the file, or with 304 when the browser has it already. */
export function assetResponse(asset: Asset, ifNoneMatch: string | undefined): Response {
  const headers = {
    'content-type': asset.type,
    etag: asset.etag,
    'cache-control': 'no-cache',
    ...(asset.link === null ? {} : { link: asset.link }),
  };
  // Compressing a file on its way makes its tag a weak one.
  return ifNoneMatch?.replace(/^W\//, '') === asset.etag
    ? new Response(null, { status: 304, headers })
    : new Response(asset.body, { headers });
}
