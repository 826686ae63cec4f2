/** One line of the forecaster's own history. */

/** Means over one hour; null where too little of it was heard. */
export interface HourLine {
  /** Whole hours since the epoch. */
  readonly hour: number;
  readonly outdoorC: number | null;
  readonly dewC: number | null;
  readonly roomC: number | null;
  /** Room at the end of the hour. */
  readonly roomEndC: number | null;
  /** Humidity ratio of the room, kg/kg. */
  readonly roomW: number | null;
  /** null too while a full island battery may hold the panels back. */
  readonly panelW: number | null;
  /** Sunshine of a cloudless sky on the level. */
  readonly clearWPerM2: number;
  /** Sensible heat that machines brought into the room less what the coil took out of it. */
  readonly machineHeatW: number | null;
  /** Sensible and latent cooling that the coil gave. */
  readonly sensibleW: number;
  readonly latentW: number | null;
  /** Part of the hour in which somebody was home. */
  readonly home: number;
}
