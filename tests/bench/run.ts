/** `npm run bench -- NAME [--json] [--quick] [--seed N]`: runs one benchmark and prints what is true. */
import { Command } from 'commander';
import { performance } from 'node:perf_hooks';
import type { BenchOptions, BenchResult } from './bench.ts';

const NAMES = ['ice', 'forecast', 'plan', 'ingest', 'season', 'drift'] as const;

function table(result: BenchResult): string {
  const rows = [result.columns, ...result.rows].map((row) => row.map(shown));
  const widths = result.columns.map((_, column) =>
    Math.max(...rows.map((row) => (row[column] ?? '').length)),
  );
  return rows
    .map((row) =>
      row
        .map((cell, column) => (column === 0 ? cell.padEnd(widths[0]) : cell.padStart(widths[column])))
        .join('  '),
    )
    .join('\n');
}

function shown(cell: string | number): string {
  if (typeof cell === 'string') return cell;
  return Number.isInteger(cell) ? String(cell) : cell.toPrecision(4);
}

async function main(): Promise<void> {
  const program = new Command('bench')
    .argument('<name>', `one of ${NAMES.join(', ')}`)
    .option('--json', 'one object on one line')
    .option('--quick', 'a shorter run')
    .option('--seed <n>', 'base seed', '1')
    .option('--nights <n>', 'nights to live (plan)')
    .parse();
  const name = program.args[0];
  if (!(NAMES as readonly string[]).includes(name)) {
    program.error(`Expected one of ${NAMES.join(', ')}, found "${name}".`, { exitCode: 2 });
  }
  const options = program.opts<{ json?: boolean; quick?: boolean; seed: string; nights?: string }>();
  const module = (await import(`./${name}.ts`)) as { run(o: BenchOptions): Promise<BenchResult> };
  const started = performance.now();
  const result = await module.run({
    seed: Number(options.seed),
    quick: options.quick === true,
    ...(options.nights === undefined ? {} : { nights: Number(options.nights) }),
  });
  const tookS = Math.round((performance.now() - started) / 100) / 10;
  if (options.json) {
    console.log(JSON.stringify({ bench: name, seed: Number(options.seed), tookS, ...result.figures }));
    return;
  }
  console.log(
    `${result.title}\n${result.budget}\nseed ${options.seed}, took ${tookS} s\n\n${table(result)}\n`,
  );
  if (result.drawing) console.log(`${result.drawing.join('\n')}\n`);
  for (const [key, value] of Object.entries(result.figures)) console.log(`${key.padEnd(36)} ${shown(value)}`);
}

await main();
