/** Panel power of the measured array, forecast on its own past and its thermometer alone. */
import { createForecaster, type Forecaster } from '../../src/forecasting/forecaster.ts';
import { clearSkyGhiWPerM2 } from '../../src/physics/sun.ts';
import { DAY_MS, HOUR_MS } from '../../src/time.ts';
import { golden, type Place } from './forecast-data.ts';
import { baselines, hourly, meanOf, type Pair } from './forecast-score.ts';
import { recordAt, siteAt } from './forecast-site.ts';
import { QUARTER_MS } from './forecast-truth.ts';

const ISSUE_MS = 3 * HOUR_MS;
const LEARN_DAYS = 30;

export function walkPanels(days: number): Pair[] | null {
  const data = golden();
  if (!data) return null;
  const config = siteAt(data.place);
  const byTime = new Map(data.lines.map((line) => [line.atMs, line]));
  const first = Math.ceil(data.lines[0].atMs / HOUR_MS) * HOUR_MS;
  const last = data.lines[data.lines.length - 1].atMs;
  const scoreFrom = Math.ceil((first + LEARN_DAYS * DAY_MS) / ISSUE_MS) * ISSUE_MS;
  const quarters: (number | null)[] = [];
  for (let at = first; at <= last; at += QUARTER_MS) quarters.push(byTime.get(at)?.powerW ?? null);
  const byHour = hourly(quarters.map((value, i) => value ?? quarters[i - 1] ?? 0));
  const forecaster = createForecaster(config, { seed: 1 });
  const pairs: Pair[] = [];
  let outdoorC: number | null = null;
  for (const [i] of quarters.entries()) {
    const nowMs = first + i * QUARTER_MS;
    if (nowMs % ISSUE_MS === 0 && i > 0)
      scorePanels(forecaster, nowMs, i / 4, scoreFrom, days, byHour, data.place, pairs);
    const line = byTime.get(nowMs);
    outdoorC = line?.outdoorC ?? outdoorC;
    forecaster.observe(
      recordAt(nowMs, {
        outdoorC: line ? outdoorC : null,
        outdoorHumidityPct: null,
        roomC: null,
        roomHumidityPct: null,
        panelPowerW: line?.powerW ?? null,
        deliveredW: null,
        latentW: null,
        fanPowerW: null,
        home: false,
      }),
    );
  }
  return pairs;
}

function scorePanels(
  forecaster: Forecaster,
  nowMs: number,
  hour: number,
  scoreFrom: number,
  days: number,
  byHour: readonly number[],
  place: Place,
  pairs: Pair[],
): void {
  const forecast = forecaster.forecast(nowMs, null);
  if (nowMs < scoreFrom || nowMs >= scoreFrom + days * DAY_MS) return;
  const perHour = HOUR_MS / forecast.slotMs;
  for (let lead = 1; lead <= 36 && hour + lead - 1 < byHour.length; lead += 1) {
    const atMs = nowMs + (lead - 0.5) * HOUR_MS;
    if (clearSkyGhiWPerM2(atMs, place.latitudeDeg, place.longitudeDeg, place.elevationM) < 20) continue;
    const slot = (lead - 1) * perHour;
    const members = Float64Array.from(forecast.scenarios, (s) =>
      meanOf(s.panelW.subarray(slot, slot + perHour)),
    );
    pairs.push({
      lead,
      members,
      observed: byHour[hour + lead - 1],
      ...baselines(byHour, hour, hour + lead - 1),
    });
  }
}
