/** Whether the wall clock can be trusted. Small boards keep no time through a power cut and wake up in 1970. */
import type { ClockState } from '../record.ts';
import { MINUTE_MS } from '../time.ts';

/** This program was not there before: a clock that says so is wrong. */
export const NOT_BEFORE_MS = Date.UTC(2026, 0, 1);

/** Room for a clock that is set right by a little, and for sensors whose own clocks run ahead. */
const SLACK_MS = 10 * MINUTE_MS;

export interface ClockSigns {
  readonly nowMs: number;
  readonly notBeforeMs: number;
  /** Time of the last record in the store; null before the first. */
  readonly lastRecordMs: number | null;
  /** How far sensors that tell their own time are ahead, median; null when none is. */
  readonly sensorsAheadMs: number | null;
}

export interface ClockVerdict {
  readonly state: ClockState;
  /** One sentence when doubtful, else empty. */
  readonly why: string;
}

export function judgeClock(signs: ClockSigns): ClockVerdict {
  const doubtful = (why: string): ClockVerdict => ({ state: 'doubtful', why });
  if (!(signs.nowMs >= signs.notBeforeMs)) {
    return doubtful(
      'The clock shows a time before this program was written: set it, or give the machine a network.',
    );
  }
  if (signs.lastRecordMs !== null && signs.lastRecordMs - signs.nowMs > SLACK_MS) {
    return doubtful('The clock is behind the last record in the store: it was set back, or lost its time.');
  }
  if (signs.sensorsAheadMs !== null && signs.sensorsAheadMs > SLACK_MS) {
    return doubtful('Sensors that tell their own time are ahead of this clock by more than ten minutes.');
  }
  return { state: 'set', why: '' };
}
