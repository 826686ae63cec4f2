import { existsSync, readdirSync, readFileSync, statSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';
import { describe, expect, it } from 'vitest';

const ROOT = resolve(import.meta.dirname, '..');
const SRC = join(ROOT, 'src');
const EDGE_FILES = new Set(['main.ts', 'cli.ts']);
const EDGE_FOLDERS = new Set(['daemon', 'verbs']);
const PURE = [
  'numerics',
  'physics',
  'plant',
  'estimation',
  'forecasting',
  'tariff',
  'planning',
  'dispatch',
  'reports',
  'cycle',
];
const MOST_LINES = 400;

interface Rule {
  readonly rooms: readonly string[];
  readonly packages: readonly string[];
}

const cell = (text: string): string[] =>
  text
    .split(',')
    .map((word) => word.trim())
    .filter((word) => word !== '');

/** The import table as DEVELOPERS.md has it. */
function table(): Map<string, Rule> {
  const text = readFileSync(join(ROOT, 'DEVELOPERS.md'), 'utf8');
  const section = text.split('## Who may import whom')[1].split('\n## ')[0];
  const rows = section
    .split('\n')
    .filter((line) => /^\| [a-zA-Z]+ \|/.test(line) && !line.startsWith('| room |'));
  return new Map(
    rows.map((row) => {
      const [, room, rooms, packages] = row.split('|');
      return [room.trim(), { rooms: cell(rooms), packages: cell(packages) }];
    }),
  );
}

function files(folder: string): string[] {
  return readdirSync(folder).flatMap((name) => {
    const path = join(folder, name);
    if (statSync(path).isDirectory()) return files(path);
    return name.endsWith('.ts') ? [path] : [];
  });
}

function roomOf(path: string): string {
  const [first, ...rest] = relative(SRC, path).split('/');
  if (rest.length > 0) return EDGE_FOLDERS.has(first) ? 'edge' : first;
  if (EDGE_FILES.has(first)) return 'edge';
  return first.startsWith('cycle') ? 'cycle' : 'V';
}

function imports(path: string): string[] {
  const text = readFileSync(path, 'utf8');
  const found = text.matchAll(
    /(?:^|\n)\s*(?:import|export)\s(?:[^'"]*?\sfrom\s)?['"]([^'"]+)['"]|import\(\s*['"]([^'"]+)['"]\s*\)/g,
  );
  return [...found].map((match) => match[1] ?? match[2]);
}

const packageName = (specifier: string): string =>
  specifier.startsWith('@') ? specifier.split('/').slice(0, 2).join('/') : specifier.split('/')[0];

const rules = table();
// The page is a browser program of its own; it imports only its own files, which its own compiler run checks.
const sources = files(SRC).filter((path) => !path.includes('/web/page/') && !path.endsWith('.d.ts'));

function allowed(path: string, specifier: string): boolean {
  const rule = rules.get(roomOf(path));
  if (!rule) return false;
  if (rule.packages.includes('everything')) return true;
  if (specifier.startsWith('.')) return rule.rooms.includes(roomOf(resolve(dirname(path), specifier)));
  return specifier.startsWith('node:')
    ? rule.packages.includes('node:*')
    : rule.packages.includes(packageName(specifier));
}

describe('import table', () => {
  it('names every room', () => {
    for (const path of sources) expect(rules.has(roomOf(path)), `${roomOf(path)} of ${path}`).toBe(true);
    expect(rules.size).toBeGreaterThan(12);
  });

  it('is kept by every file, type imports counted', () => {
    const broken = sources.flatMap((path) =>
      imports(path)
        .filter((specifier) => !allowed(path, specifier))
        .map((specifier) => `${relative(ROOT, path)} imports ${specifier}`),
    );
    expect(broken).toEqual([]);
  });

  it('imports only files that exist', () => {
    const missing = sources.flatMap((path) =>
      imports(path).filter(
        (specifier) => specifier.startsWith('.') && !existsSync(resolve(dirname(path), specifier)),
      ),
    );
    expect(missing).toEqual([]);
  });

  it('keeps the interlocks apart from their siblings', () => {
    const siblings = imports(join(SRC, 'dispatch/interlocks.ts')).filter((specifier) =>
      specifier.startsWith('./'),
    );
    expect(siblings).toEqual(['./types.ts']);
  });

  it('has no cycle among files', () => {
    const graph = new Map(
      sources.map((path) => [
        path,
        imports(path)
          .filter((s) => s.startsWith('.'))
          .map((s) => resolve(dirname(path), s)),
      ]),
    );
    const done = new Set<string>();
    const visit = (path: string, trail: readonly string[]): void => {
      if (trail.includes(path))
        throw new Error(
          `cycle: ${[...trail.slice(trail.indexOf(path)), path].map((p) => relative(SRC, p)).join(' → ')}`,
        );
      if (done.has(path)) return;
      for (const next of graph.get(path) ?? []) visit(next, [...trail, path]);
      done.add(path);
    };
    for (const path of sources) visit(path, []);
    expect(done.size).toBeGreaterThanOrEqual(sources.length);
  });
});

/** Code without its comments and texts, so that a sentence may say what code may not. */
function bareCode(path: string): string {
  return readFileSync(path, 'utf8')
    .replace(/\/\*[\s\S]*?\*\//g, '')
    .replace(/(^|[^:])\/\/.*$/gm, '$1')
    .replace(/'(?:[^'\\\n]|\\.)*'|"(?:[^"\\\n]|\\.)*"/g, "''");
}

describe('pure rooms', () => {
  const IMPURE =
    /\bDate\.now\(|\bnew Date\(\)|\bMath\.random\(|\bprocess\.|\bconsole\.|\bset(?:Timeout|Interval|Immediate)\(|\bperformance\./;

  it('take time, randomness and options as arguments', () => {
    const pure = sources.filter((path) => PURE.includes(roomOf(path)));
    expect(pure.length).toBeGreaterThan(20);
    expect(pure.filter((path) => IMPURE.test(bareCode(path))).map((path) => relative(ROOT, path))).toEqual(
      [],
    );
  });

  it('would notice', () => {
    expect(IMPURE.test('const a = Date.now();')).toBe(true);
    expect(IMPURE.test('const a = new Date(ms);')).toBe(false);
  });
});

describe('size', () => {
  it(`keeps every file within ${MOST_LINES} lines`, () => {
    const long = sources.filter((path) => readFileSync(path, 'utf8').split('\n').length > MOST_LINES + 1);
    expect(long.map((path) => relative(ROOT, path)).filter((path) => path !== 'src/config.ts')).toEqual([]);
  });

  it('keeps the top level as agreed', () => {
    const agreed = [
      'DEVELOPERS.md',
      'Dockerfile',
      'LICENSE',
      'README.md',
      'addon',
      'config',
      'package-lock.json',
      'package.json',
      'src',
      'tests',
      'tsconfig.json',
    ];
    const found = readdirSync(ROOT).filter(
      (name) =>
        !name.startsWith('.') &&
        !['node_modules', 'dist', 'coverage'].includes(name) &&
        !/\.db(-wal|-shm)?$/.test(name),
    );
    expect(found.toSorted()).toEqual(agreed);
  });
});
