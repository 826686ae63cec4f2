/** The noise of the drift figures on nights of plants that have nothing wrong, weather taken out. */
import { seriesOf, type Series, type SeriesName } from '../../src/reports/drift-series.ts';
import type { NightSheet } from '../../src/reports/night.ts';
import type { FigureNoise, Noises } from '../reports/drift-story.ts';

/** The estimator's first weeks, which drift leaves out as well. */
export const LEARNING_NIGHTS = 14;

/** Spread and lag-one likeness of each figure, weather taken out, pooled over the plants. */
export function noiseOf(plants: readonly NightSheet[][]): Noises {
  const byName = new Map<SeriesName, number[][]>();
  for (const sheets of plants) {
    for (const series of seriesOf(sheets.slice(LEARNING_NIGHTS))) {
      if (series.nights.length < 12) continue;
      byName.set(series.name, [...(byName.get(series.name) ?? []), withoutWeather(series)]);
    }
  }
  return Object.fromEntries([...byName].map(([name, runs]) => [name, pooled(runs)]));
}

function pooled(runs: readonly number[][]): FigureNoise {
  const squares = runs.flat().reduce((sum, value) => sum + value * value, 0);
  const lagged = runs.reduce(
    (sum, values) => sum + values.slice(1).reduce((part, value, i) => part + value * values[i], 0),
    0,
  );
  const rho = squares > 0 ? lagged / squares : 0;
  return { sd: Math.sqrt(squares / runs.flat().length), rho: Math.max(0, Math.min(0.97, rho)) };
}

/** Residuals of a least-squares fit on the series' own weather. */
function withoutWeather(series: Series): number[] {
  const columns = [
    series.nights.map(() => 1),
    ...series.nights[0].weather.map((_, j) => series.nights.map((night) => night.weather[j])),
  ];
  const basis: number[][] = [];
  const takeOut = (values: readonly number[]): number[] =>
    basis.reduce<number[]>(
      (left, column) => {
        const along = left.reduce((sum, value, i) => sum + value * column[i], 0);
        return left.map((value, i) => value - along * column[i]);
      },
      [...values],
    );
  for (const column of columns) {
    const rest = takeOut(column);
    const norm = Math.hypot(...rest);
    if (norm > 1e-9) basis.push(rest.map((value) => value / norm));
  }
  return takeOut(series.nights.map((night) => night.value));
}
