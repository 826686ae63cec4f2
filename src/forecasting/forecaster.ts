/**
 * The evening ahead as scenarios: weather from the site's own past and a hub, the learned cabin run through each, and
 * the cooling that would hold the comfort limit. Everything that it says is drawn from a seed and the records alone.
 */
import type { SiteConfig } from '../config.ts';
import { createRandom } from '../numerics/random.ts';
import { HOUR_MS } from '../time.ts';
import { blendAt, blended, hubByLead, type Blend } from './blend.ts';
import { Book } from './book.ts';
import { ensembleQuantile } from './ensemble.ts';
import { HourGatherer, type Observed } from './hours.ts';
import { issueOf, keepIssue, type Issue } from './issues.ts';
import { knowsSentence } from './knows.ts';
import { packMemory, unpackMemory } from './memory.ts';
import { createOwnCabin } from './own-cabin.ts';
import { createOwnWeather, type HoursAhead } from './own-weather.ts';
import { lookBack, type Past } from './past.ts';
import {
  loadPlantOf,
  runScenario,
  scenarioFrame,
  type LastSeen,
  type Scenario,
  type ScenarioFrame,
} from './scenarios.ts';
import { eveningSlots, leadsFor, slotGrid } from './slots.ts';
import { drawTrajectories } from './trajectories.ts';

export type { Scenario } from './scenarios.ts';

export interface HubPoint {
  readonly atMs: number;
  readonly temperatureC: number;
}

export interface Forecast {
  readonly madeMs: number;
  /** Start of slot 0. */
  readonly startMs: number;
  readonly slotMs: number;
  readonly scenarios: readonly Scenario[];
  /** One sentence: what it rests on. */
  readonly knows: string;
  /** Load from now to the end of the night (in the last three hours before noon: of the next one): mean and 90th percentile. */
  readonly eveningLoadKwh: number;
  readonly eveningLoadHighKwh: number;
}

export interface Forecaster {
  observe(record: Observed): void;
  forecast(nowMs: number, external: readonly HubPoint[] | null): Forecast;
  /** JSON-able; a forecaster made with it goes on where this one stands, the hour in progress left out. */
  memory(): unknown;
}

export function createForecaster(
  config: SiteConfig,
  options: { readonly seed: number; readonly memory?: unknown },
): Forecaster {
  const remembered = unpackMemory(options.memory);
  const gatherer = new HourGatherer(config);
  let book = new Book(config, remembered?.lines ?? []);
  const weather = createOwnWeather(config);
  const plant = loadPlantOf(config);
  const cabin = createOwnCabin(config, remembered?.cabin ?? null);
  let issues: readonly Issue[] = remembered?.issues ?? [];
  let seen: LastSeen = { outdoorC: null, roomC: null, atMs: 0 };

  return {
    observe(record) {
      if (record.clock === 'doubtful') return;
      for (const line of gatherer.add(record)) {
        book = book.with(line);
        cabin.update(book);
      }
      seen = { atMs: record.atMs, outdoorC: record.outdoorC, roomC: record.roomC };
    },
    forecast(nowMs, external) {
      const grid = slotGrid(config, nowMs);
      const lastHour = Math.floor(nowMs / HOUR_MS) - 1;
      const leads = leadsFor(grid, lastHour);
      const ahead = weather.predict(book, lastHour, leads);
      const hubC = external ? hubByLead(external, lastHour, leads) : null;
      const past = lookBack(book, issues, lastHour, leads, cabin.track(book).unexplainedW, ahead.sky);
      issues = keepIssue(issues, issueOf(lastHour, ahead, hubC));
      const frame = scenarioFrame(config, plant, book, cabin, grid, lastHour, seen, nowMs);
      const scenarios = drawScenarios(config, options.seed, frame, ahead, hubC, past);
      return {
        madeMs: nowMs,
        startMs: grid.startMs,
        slotMs: grid.slotMs,
        scenarios,
        ...eveningLoad(scenarios, eveningSlots(config, grid, nowMs), grid.slotMs),
        knows: knowsOf(
          book.daysOfWeather,
          hubC === null ? null : blendAt(past.blends, 24),
          cabin.memory,
          frame.hasPanels,
        ),
      };
    },
    memory: () => packMemory(book.lines, issues, cabin.memory),
  };
}

/** The expected weather with each of the error trajectories on it, run through the cabin. */
function drawScenarios(
  config: SiteConfig,
  seed: number,
  frame: ScenarioFrame,
  ahead: HoursAhead,
  hubC: readonly (number | null)[] | null,
  past: Past,
): Scenario[] {
  const { lastHour } = frame;
  const leads = ahead.outdoorC.length;
  const outdoorC = ahead.outdoorC.map((own, i) => blended(past.blends, i + 1, own, hubC?.[i] ?? null));
  const expected = { ...ahead, outdoorC, disturbanceW: past.disturbanceW };
  const random = createRandom(seed).fork('forecast');
  const issues = past.comparable(hubC !== null);
  const errors = drawTrajectories(issues, past.happened, lastHour, leads, config.planning.scenarios, random);
  return errors.map((error) => runScenario(frame, expected, error, 1 / errors.length));
}

function eveningLoad(
  scenarios: readonly Scenario[],
  slots: number,
  slotMs: number,
): { eveningLoadKwh: number; eveningLoadHighKwh: number } {
  const loads = scenarios.map(
    (scenario) =>
      (scenario.loadW.subarray(0, slots).reduce((sum, watts) => sum + watts, 0) * slotMs) / HOUR_MS / 1000,
  );
  const eveningLoadKwh = loads.reduce((sum, load) => sum + load, 0) / loads.length;
  return { eveningLoadKwh, eveningLoadHighKwh: ensembleQuantile(loads, 0.9) };
}

function knowsOf(
  weatherDays: number,
  hub: Blend | null,
  cabin: { readonly learnedHours: number; readonly refusedDays: readonly number[] } | null,
  hasPanels: boolean,
): string {
  return knowsSentence({
    weatherDays,
    hub: hub && { sdK: hub.hubSdK, issues: hub.issues, weight: hub.hubWeight },
    cabinDays: (cabin?.learnedHours ?? 0) / 24,
    refusedDays: cabin?.refusedDays.length ?? 0,
    sun: hasPanels ? 'panels' : 'daily range',
  });
}
