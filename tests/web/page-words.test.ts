import { readFileSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';

it('keeps every English word of the page in the files of strings', () => {
  const dir = new URL('../../src/web/page/', import.meta.url).pathname;
  const files = readdirSync(dir).filter((name) => name.endsWith('.ts') && !/^strings(-\w+)?\.ts$/.test(name));
  const sentences = files.flatMap((name) =>
    [
      ...readFileSync(join(dir, name), 'utf8')
        .replaceAll(/\/\*[^]*?\*\/|^\s*\/\/.*$/gm, '')
        .matchAll(/(['"`])([A-Z][a-z]+ [^'"`\n]*)\1/g),
    ].map(([, , sentence]) => `${name}: ${sentence}`),
  );
  expect(sentences).toEqual([]);
});
