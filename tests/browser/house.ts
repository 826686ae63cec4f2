/**
 * A whole house behind the page: a broker, a simulated Juniper hut, and the real daemon with its database, on a clock
 * that moves only when the test lets the house live.
 */
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { SiteConfig } from '../../src/config.ts';
import { startSite, type Running } from '../../src/main.ts';
import { startEmbeddedBroker, type EmbeddedBroker } from '../../src/mqtt/embedded-broker.ts';
import type { PointId } from '../../src/points.ts';
import { seededWeather } from '../../src/simulator/seeded-weather.ts';
import { createSimulator, type Simulator } from '../../src/simulator/simulator.ts';
import { createSteppedClock, type SteppedClock } from '../../src/simulator/stepped-clock.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { MINUTE_MS } from '../../src/time.ts';
import { lockstep } from '../../src/verbs/lockstep.ts';
import { SimulatedPlant } from '../../src/verbs/simulated-plant.ts';

export const PASSPHRASE = 'melt water at noon';
/** A look each two minutes instead of each half: a quarter of the messages, the same decisions. */
const CYCLE_MS = 2 * MINUTE_MS;
/** A hot day that the hut's machine is made for. */
const HOT_DAY_C = 31;
const SEED = 1;
const SILENT = { info: () => {}, warn: () => {}, error: () => {} };

export interface HouseOptions {
  readonly startMs: number;
  readonly pageDir: string;
  readonly units?: 'SI' | 'IP';
  readonly passphrase?: string | null;
  /** Folder of an earlier house whose database is gone on with. */
  readonly folder?: string;
}

export interface House {
  readonly config: SiteConfig;
  readonly clock: SteppedClock;
  readonly running: Running;
  readonly simulator: Simulator;
  readonly brokerUrl: string;
  readonly pageUrl: string;
  readonly folder: string;
  /** Points whose probes have lost their voice. */
  readonly silent: Set<PointId>;
  /** The plant lives on and is heard. */
  live(minutes: number): Promise<void>;
  brokerAway(): Promise<void>;
  brokerBack(): Promise<void>;
  /** Ends daemon, plant and broker; the folder stays. */
  stop(): Promise<void>;
  remove(): void;
}

export async function startHouse(options: HouseOptions): Promise<House> {
  const folder = options.folder ?? mkdtempSync(join(tmpdir(), 'rimehold-house-'));
  let broker: EmbeddedBroker | null = await startEmbeddedBroker({ host: '127.0.0.1', port: 0 });
  const { port, url } = broker;
  const config = siteOf(options, url, folder);
  const clock = createSteppedClock(options.startMs);
  const hut = hutOf(config, options.startMs);
  const silent = new Set<PointId>();
  const simulator = mutedBy(silent, hut);
  const running = await startSite(config, { clock, log: SILENT, pageDir: options.pageDir });
  const plant = new SimulatedPlant({ config, simulator, url });
  await plant.start();
  return {
    config,
    clock,
    running,
    simulator,
    brokerUrl: url,
    pageUrl: running.pageUrl ?? '',
    folder,
    silent,
    live: async (minutes) => {
      const endMs = clock.nowMs() + minutes * MINUTE_MS;
      while (clock.nowMs() < endMs) {
        let steps = 0;
        await lockstep({ clock, running, plant, stepMs: CYCLE_MS, goesOn: () => steps++ < 1 });
        await ordersThrough();
      }
    },
    brokerAway: async () => {
      await broker?.stop();
      broker = null;
    },
    brokerBack: async () => {
      broker = await startEmbeddedBroker({ host: '127.0.0.1', port });
    },
    stop: async () => {
      await running.stop();
      await plant.stop();
      await broker?.stop();
    },
    remove: () => rmSync(folder, { recursive: true, force: true }),
  };
}

function siteOf(
  { units = 'SI', passphrase = PASSPHRASE }: HouseOptions,
  url: string,
  folder: string,
): SiteConfig {
  const parsed = parseSiteFile(readFileSync(join(import.meta.dirname, '../../config/juniper.yaml'), 'utf8'));
  if (!parsed.ok) throw new Error('config/juniper.yaml has faults');
  const { config } = parsed;
  const passphraseFile = passphrase === null ? null : join(folder, 'passphrase');
  if (passphraseFile !== null && passphrase !== null) writeFileSync(passphraseFile, `${passphrase}\n`);
  return {
    ...config,
    site: { ...config.site, units },
    broker: { ...config.broker, url },
    planning: { ...config.planning, cycleMs: CYCLE_MS },
    // on a clock that runs ahead a flush each half minute of it would be one each millisecond
    store: { ...config.store, file: join(folder, 'juniper.db'), flushMs: 10 * MINUTE_MS },
    web: { ...config.web, host: '127.0.0.1', port: 0, passphraseFile, passphraseEnv: null },
    log: { level: 'error', form: 'json' },
  };
}

function hutOf(config: SiteConfig, startMs: number): Simulator {
  const { latitudeDeg, longitudeDeg, elevationM } = config.site;
  const weather = seededWeather({ seed: SEED, latitudeDeg, longitudeDeg, elevationM, hotDayC: HOT_DAY_C });
  const start = { iceKg: 0, waterC: 12, roomC: 25 };
  return createSimulator({ site: config, seed: SEED, startMs, weather, start });
}

/** The same hut with some of its probes unheard. */
function mutedBy(silent: ReadonlySet<PointId>, hut: Simulator): Simulator {
  return new Proxy(hut, {
    get: (_, key: keyof Simulator) =>
      key === 'advance'
        ? (toMs: number) => hut.advance(toMs).filter(({ point }) => !silent.has(point))
        : hut[key].bind(hut),
  });
}

/** An order goes from the daemon to the broker and on to the plant: each way takes a turn or two of the sockets. */
async function ordersThrough(): Promise<void> {
  for (let turn = 0; turn < 6; turn += 1) await new Promise((done) => setImmediate(done));
}
