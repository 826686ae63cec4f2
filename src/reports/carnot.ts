/** Carnot's COP, the yardstick of every refrigerating machine. */

const KELVIN = 273.15;
/** Condensing stands above outdoor air by about this much (common practice, no source). */
const PINCH_K = 12;

/** Between an evaporating temperature and condensing at an outdoor temperature. */
export function carnotAt(evaporatingC: number, outdoorC: number): number {
  return (evaporatingC + KELVIN) / (outdoorC + PINCH_K - evaporatingC);
}
