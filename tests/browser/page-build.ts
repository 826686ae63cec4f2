/** Compiles the page as the build does, into a folder of its own, so that these tests never see an old build. */
import { execFileSync } from 'node:child_process';
import { cpSync, mkdtempSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../..', import.meta.url));
const pageSource = join(root, 'src/web/page');

export interface BuiltPage {
  readonly pageDir: string;
  remove(): void;
}

export function buildPage(): BuiltPage {
  const out = mkdtempSync(join(tmpdir(), 'rimehold-page-'));
  const tsc = join(root, 'node_modules/.bin/tsc');
  execFileSync(tsc, ['-p', pageSource, '--noEmit', 'false', '--outDir', out], { stdio: 'inherit' });
  const pageDir = join(out, 'web/page');
  for (const name of readdirSync(pageSource)) {
    if (/\.(html|css|svg)$/.test(name)) cpSync(join(pageSource, name), join(pageDir, name));
  }
  return { pageDir, remove: () => rmSync(out, { recursive: true, force: true }) };
}
