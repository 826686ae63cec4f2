/** The night in quarter hours, for the plots of the sheet: kept with the sheet, as records are thinned later. */
import type { CycleRecord } from '../record.ts';
import { formatInstant, MINUTE_MS, type Night } from '../time.ts';
import type { NightSheet } from './night-schema.ts';
import { bySlot, hoursOf, meanOver, roundedOrNull, type Span } from './spans.ts';

const STEP_MS = 15 * MINUTE_MS;

export function traceOf(spans: readonly Span[], night: Night): NightSheet['trace'] {
  const slots = bySlot(spans, night.startMs, STEP_MS);
  const parts = Array.from(
    { length: Math.round((night.endMs - night.startMs) / STEP_MS) },
    (_, index) => slots.get(index) ?? [],
  );
  const column = (pick: (record: CycleRecord) => number | null, decimals: number): (number | null)[] =>
    parts.map((part) => roundedOrNull(meanOver(part, pick), decimals));
  return {
    stepMs: STEP_MS,
    start: formatInstant(night.startMs),
    price: column((record) => record.priceMoneyPerKwh, 4),
    outdoorC: column((record) => record.outdoorC, 1),
    roomC: column((record) => record.roomC, 1),
    limitC: column((record) => record.limitC, 1),
    iceKwh: column((record) => record.iceOnHandKwh, 2),
    iceLowKwh: column((record) => record.iceOnHandLowKwh, 2),
    iceHighKwh: column((record) => record.iceOnHandHighKwh, 2),
    mode: parts.map(mainMode),
  };
}

/** The mode that filled most of a quarter hour. */
function mainMode(part: readonly Span[]): CycleRecord['mode'] | null {
  let best: CycleRecord['mode'] | null = null;
  let bestHours = 0;
  for (const mode of new Set(part.map((span) => span.record.mode))) {
    const hours = hoursOf(part, (record) => record.mode === mode);
    if (hours > bestHours) [best, bestHours] = [mode, hours];
  }
  return best;
}
