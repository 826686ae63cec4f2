/**
 * A season of the whole job in the simulator's truth plant: how fast it lives, what it leaves on disk, how long a plan,
 * a night sheet and a year's ledger take, and how soon after its start the daemon gives its first command.
 */
import { spawn } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { connectAsync } from 'mqtt';
import { sheetOf } from '../../src/daemon/nights.ts';
import { quantile } from '../../src/numerics/quantile.ts';
import { readSheet } from '../../src/reports/night-schema.ts';
import { weatherForSite } from '../../src/simulator/seeded-weather.ts';
import { createSimulator } from '../../src/simulator/simulator.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { openStore } from '../../src/store/store.ts';
import { DAY_MS, formatInstant, nightOf, noonOf } from '../../src/time.ts';
import { startMosquitto } from '../mqtt/mosquitto.ts';
import { DirectLoop } from '../scenarios/direct-loop.ts';
import type { BenchOptions, BenchResult } from './bench.ts';

const ROOT = join(import.meta.dirname, '../..');
const FIRST_DATE = '2026-07-01';
const YEAR_NIGHTS = 365;

const median = (values: readonly number[]): number => quantile(values, 0.5);

export async function run({ seed, quick }: BenchOptions): Promise<BenchResult> {
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-season-'));
  try {
    const days = quick ? 2 : 8;
    const lived = live(folder, days, seed);
    const start = await firstCommandMs(folder);
    const figures = { ...lived, ...start };
    return {
      title: `Season: ${days} days of Juniper in the truth plant, every stage, SQLite on disk`,
      budget:
        'Held against: replan 50 ms median, first command 3000 ms, year ledger 300 ms; takes about a minute.',
      columns: ['figure', 'value'],
      rows: Object.entries(figures).map(([name, value]) => [name, value]),
      figures,
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

function juniperText(): string {
  return readFileSync(join(ROOT, 'config/juniper.yaml'), 'utf8');
}

function live(folder: string, days: number, seed: number): Record<string, number> {
  const parsed = parseSiteFile(juniperText());
  if (!parsed.ok) throw new Error('config/juniper.yaml has faults');
  const { config } = parsed;
  const { zone } = config.site;
  const startMs = noonOf(zone, FIRST_DATE);
  const simulator = createSimulator({
    site: config,
    seed,
    startMs,
    weather: weatherForSite(config, seed),
    start: { iceKg: 0, waterC: 12 },
  });
  const file = join(folder, 'season.db');
  const store = openStore(file, { siteId: config.site.id });
  const planMs: number[] = [];
  const loop = new DirectLoop({
    config,
    simulator,
    startMs,
    seed,
    onReadings: (readings) => store.addReadings(readings),
    onPlan: (plan, tookMs) => {
      store.addPlan(plan);
      planMs.push(tookMs);
    },
  });
  const begunMs = performance.now();
  for (let cycle = 0; cycle < (days * DAY_MS) / config.planning.cycleMs; cycle += 1) {
    store.addRecord(loop.cycle().record);
    if (cycle % 10 === 9) store.flush();
  }
  const tookS = (performance.now() - begunMs) / 1000;
  store.flush();
  const sheetMs: number[] = [];
  let body = '';
  for (let night = 0; night < days; night += 1) {
    const {
      date,
      startMs: nightMs,
      endMs,
    } = nightOf(zone, new Date(startMs + night * DAY_MS).toISOString().slice(0, 10));
    const before = performance.now();
    const sheet = sheetOf(config, store, { date, startMs: nightMs, endMs }, endMs, null);
    sheetMs.push(performance.now() - before);
    body = JSON.stringify(sheet);
  }
  store.backup(join(folder, 'copy.db'));
  const dbBytesPerDay = Math.round(statSync(join(folder, 'copy.db')).size / days);
  for (let night = 0; night < YEAR_NIGHTS; night += 1) {
    store.addSheet(new Date(Date.UTC(2025, 6, 1) + night * DAY_MS).toISOString().slice(0, 10), body);
  }
  const ledgerBegunMs = performance.now();
  const sheets = store.sheets('2025-07-01', '2026-06-30').flatMap((one) => readSheet(one.body) ?? []);
  const yearLedgerMs = performance.now() - ledgerBegunMs;
  if (sheets.length !== YEAR_NIGHTS) throw new Error(`expected ${YEAR_NIGHTS} sheets, read ${sheets.length}`);
  store.close();
  return {
    simDaysPerSecond: round(days / tookS, 3),
    dbBytesPerDay,
    nightSheetMs: round(median(sheetMs), 1),
    replanMs: round(median(planMs), 1),
    yearLedgerMs: round(yearLedgerMs, 1),
  };
}

/** From the start of the process to its first order on a real broker, and what it then holds in memory. */
async function firstCommandMs(folder: string): Promise<Record<string, number>> {
  const broker = await startMosquitto();
  const file = join(folder, 'site.yaml');
  writeFileSync(
    file,
    `${juniperText().replace('mqtt://127.0.0.1:1883', broker.url)}\nstore: { file: ${join(folder, 'first.db')} }\nweb: { host: 127.0.0.1, port: 0 }\nlog: { level: error }\n`,
  );
  const watcher = await connectAsync(broker.url);
  await watcher.subscribeAsync('homie/5/juniper/dispatch/order');
  const begunMs = performance.now();
  const child = spawn(
    process.execPath,
    [
      join(ROOT, 'dist/cli.js'),
      'run',
      '--config',
      file,
      '--lapse',
      '1',
      '--epoch',
      formatInstant(Date.now()),
    ],
    { stdio: 'ignore' },
  );
  try {
    await new Promise<void>((done, fail) => {
      watcher.once('message', () => done());
      child.once('exit', (code) => fail(new Error(`the daemon ended with ${code}; is it built?`)));
    });
    const startToFirstCommandMs = Math.round(performance.now() - begunMs);
    await new Promise((done) => setTimeout(done, 2000));
    return { startToFirstCommandMs, daemonRssMb: round(rssMb(child.pid ?? 0), 1) };
  } finally {
    child.removeAllListeners('exit');
    child.kill('SIGTERM');
    await new Promise((done) => child.once('exit', done));
    await watcher.endAsync();
    await broker.stop();
  }
}

function rssMb(pid: number): number {
  const status = readFileSync(`/proc/${pid}/status`, 'utf8');
  return Number(/VmRSS:\s+(\d+) kB/.exec(status)?.[1] ?? Number.NaN) / 1024;
}

const round = (value: number, decimals: number): number => Number(value.toFixed(decimals));
