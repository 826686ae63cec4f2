/** `rimehold demo`: embedded broker, simulated Juniper and daemon; one evening in about three minutes, then its night sheet. */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { SiteConfig } from '../config.ts';
import { EXIT, RimeholdError } from '../errors.ts';
import { createLog, startSite, type Running } from '../main.ts';
import { renderText } from '../reports/render-text.ts';
import type { CycleRecord } from '../record.ts';
import { seededWeather } from '../simulator/seeded-weather.ts';
import { createSimulator } from '../simulator/simulator.ts';
import { createSteppedClock, type SteppedClock } from '../simulator/stepped-clock.ts';
import { HOUR_MS, localClock, MINUTE_MS, noonOf } from '../time.ts';
import { lockstep } from './lockstep.ts';
import { stopSignal } from './run.ts';
import { loadSite } from './site.ts';
import { SimulatedPlant } from './simulated-plant.ts';

const FACTOR = 720;
/** A hot day in the demo's July. It begins with an empty bank at midnight; from noon on it goes at the demo's pace. */
const EVENING = '2026-07-14';
const MIDNIGHT_BEFORE_NOON_MS = 12 * HOUR_MS;
/** A look a minute instead of two, so that a small machine keeps the pace. */
const STEP_MS = MINUTE_MS;
/** A hot day that Juniper's machine is made for. */
const HOT_DAY_C = 31;

export async function demo(options: { stay?: boolean; seed?: string }): Promise<number> {
  const seed = Number(options.seed ?? '1');
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-demo-'));
  const config = demoSite(folder);
  const noonMs = noonOf(config.site.zone, EVENING);
  const startMs = noonMs - MIDNIGHT_BEFORE_NOON_MS;
  const clock = createSteppedClock(startMs);
  const running = await startDemoSite(config, clock);
  const line = progressLine(config);
  let plant: SimulatedPlant | null = null;
  try {
    plant = await startPlant(config, running, startMs, seed);
    console.log(greeting(running));
    running.daemon.observe({ record: (record) => line.show(record) });
    let stopped = false;
    let over = false;
    void stopSignal().then(() => (stopped = true));
    running.daemon.observe({
      night: (sheet) => {
        if (sheet.night.date !== EVENING) return;
        line.end();
        console.log(renderText(sheet));
        if (options.stay) console.log(`Staying; the page is at ${running.pageUrl}. End with Ctrl-C.`);
        over = options.stay !== true;
      },
    });
    await lockstep({
      clock,
      running,
      plant,
      stepMs: STEP_MS,
      mostRate: FACTOR,
      goesOn: () => !stopped && !over,
    });
  } finally {
    await running.stop();
    await plant?.stop();
    rmSync(folder, { recursive: true, force: true });
  }
  return EXIT.yes;
}

function demoSite(folder: string): SiteConfig {
  const config = loadSite(fileURLToPath(new URL('../../config/juniper.yaml', import.meta.url)));
  return {
    ...config,
    broker: { ...config.broker, embedded: true, listenHost: '127.0.0.1', listenPort: 0 },
    planning: { ...config.planning, cycleMs: STEP_MS },
    store: { ...config.store, file: join(folder, 'juniper.db') },
    web: { ...config.web, host: '127.0.0.1', passphraseFile: null, passphraseEnv: null },
    log: { level: 'error', form: 'people' },
  };
}

/** The page takes its usual port, or any free one when somebody else has that. */
async function startDemoSite(config: SiteConfig, clock: SteppedClock): Promise<Running> {
  const options = { clock, clockRate: FACTOR, log: createLog(config) };
  try {
    return await startSite(config, options);
  } catch (error) {
    if (!(error instanceof RimeholdError && error.code === 'port-in-use')) throw error;
    return startSite({ ...config, web: { ...config.web, port: 0 } }, options);
  }
}

async function startPlant(
  config: SiteConfig,
  running: Running,
  startMs: number,
  seed: number,
): Promise<SimulatedPlant> {
  const { latitudeDeg, longitudeDeg, elevationM } = config.site;
  const weather = seededWeather({ seed, latitudeDeg, longitudeDeg, elevationM, hotDayC: HOT_DAY_C });
  const simulator = createSimulator({
    site: config,
    seed,
    startMs,
    weather,
    start: { iceKg: 0, waterC: 12, roomC: 25 },
  });
  const plant = new SimulatedPlant({ config, simulator, url: running.brokerUrl });
  await plant.start();
  return plant;
}

function greeting(running: Running): string {
  return [
    'rimehold demo: a simulated Juniper hut. The night before passes quickly; from',
    'noon on one evening takes two minutes, on a clock 720 times as fast (longer on',
    'a slow machine: nothing is skipped). The first figures know nothing of the',
    'bank yet: the interval tells.',
    `Page: ${running.pageUrl ?? 'not served'}   Broker: ${running.brokerUrl}`,
    '',
    'time   leaving   ice on hand (90 % sure)   command and reason',
  ].join('\n');
}

const WIDTH = 80;
const LINES_EVERY_MS = HOUR_MS / 2;

/** One line that is written over on a terminal; elsewhere a new line each half hour and at each change of command. */
function progressLine(config: SiteConfig): { show(record: CycleRecord): void; end(): void } {
  const live = process.stdout.isTTY;
  let shownMs = 0;
  let command = '';
  return {
    show(record) {
      const changed = record.command !== command;
      if (!live && !changed && record.atMs - shownMs < LINES_EVERY_MS) return;
      const text = lineOf(config, record);
      if (live && !changed) process.stdout.write(`\r${text.slice(0, WIDTH - 1).padEnd(WIDTH - 1)}`);
      else process.stdout.write(`${live ? `\r${''.padEnd(WIDTH - 1)}\r` : ''}${wrapLine(text)}\n`);
      shownMs = record.atMs;
      command = record.command;
    },
    end() {
      process.stdout.write(live ? `\r${''.padEnd(WIDTH - 1)}\r\n` : '\n');
    },
  };
}

function lineOf(config: SiteConfig, record: CycleRecord): string {
  const leaving =
    record.leavingWaterC === null ? '   –   ' : `${record.leavingWaterC.toFixed(1).padStart(4)} °C`;
  const ice = `${record.iceOnHandKwh.toFixed(1).padStart(4)} kWh (${record.iceOnHandLowKwh.toFixed(1)} to ${record.iceOnHandHighKwh.toFixed(1)})`;
  return `${localClock(config.site.zone, record.atMs)}  ${leaving}  ${ice.padEnd(24)}  ${record.command}: ${record.reason}`;
}

/** Folds a long line so that its reason stands under itself. */
function wrapLine(text: string): string {
  const indent = ' '.repeat(15);
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(/(?<=\S) (?=\S)/)) {
    if (line !== '' && line.length + word.length + 1 > WIDTH) {
      lines.push(line);
      line = indent + word;
    } else line = line === '' ? word : `${line} ${word}`;
  }
  return [...lines, line].join('\n');
}
