/** Saturated humidity ratio read from a table: the forecast asks for it thousands of times. */
import { saturationHumidityRatio, standardPressurePa } from '../physics/moist-air.ts';

const COLDEST_C = -40;
const WARMEST_C = 60;
const STEP_K = 0.5;

/** Humidity ratio of saturated air, kg/kg, at a temperature, °C; linear in the table, held at its ends. */
export type Saturation = (airC: number) => number;

export function saturationAt(elevationM: number): Saturation {
  const pressurePa = standardPressurePa(elevationM);
  const table = Float64Array.from({ length: (WARMEST_C - COLDEST_C) / STEP_K + 1 }, (_, i) =>
    saturationHumidityRatio(COLDEST_C + i * STEP_K, pressurePa),
  );
  return (airC) => {
    const position = (Math.min(WARMEST_C, Math.max(COLDEST_C, airC)) - COLDEST_C) / STEP_K;
    const below = Math.min(table.length - 2, Math.floor(position));
    return table[below] + (table[below + 1] - table[below]) * (position - below);
  };
}
