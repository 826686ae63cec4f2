import type { NightSheet } from '../../src/reports/night.ts';
import { juniper, toldSheet } from './juniper.ts';

/** A sheet as full as a bad night makes it. */
export function fullestSheet(units: 'SI' | 'IP'): NightSheet {
  const sheet = toldSheet({ lostW: { charging: 300 } }, { site: juniper(units, 'USD') });
  const long =
    'Making ice since 03:15: 11 ct until 06:00, and the evening may need 9.3 kWh; 6.1 are in the bank, and an hour of waiting would cost 12 ct at tomorrow’s noon, the dearest of the week.';
  const [first] = sheet.commands;
  return {
    ...sheet,
    whole: false,
    coveredPct: 71.2,
    partialBecause:
      '412 min without records in 3 gaps, the longest 01:10–05:02; issued at 11:00, before the night was over',
    commands: Array.from({ length: 60 }, () => ({
      ...first,
      reason: long,
      heldBackBy: 'Minimum rest: 7 min to go.',
    })),
    electricity: {
      ...sheet.electricity,
      byPeriod: Array.from({ length: 6 }, (_, i) => ({
        ...sheet.electricity.byPeriod[0],
        period: `period ${i} of the season`,
      })),
    },
    comparisons: [...sheet.comparisons, { ...sheet.comparisons[0], strategy: 'timetable' }],
    cop: { ...sheet.cop, byHour: Array.from({ length: 24 }, () => sheet.cop.byHour[0]) },
    probes: sheet.probes.map((one) => ({
      ...one,
      staleMinutes: 40,
      errorAtIcePointK: -0.31,
      setAside: 'stuck for 6 h',
    })),
    interlocks: Array.from({ length: 8 }, () => ({
      what: 'Outdoor air above the limit: 44.1 degC.',
      minutes: 31,
      times: 4,
      first: sheet.night.start,
    })),
    wishes: Array.from({ length: 8 }, () => ({
      from: sheet.night.start,
      to: sheet.night.end,
      wish: 'stand-down' as const,
    })),
    gaps: Array.from({ length: 9 }, () => ({ from: sheet.night.start, to: sheet.night.end, minutes: 9 })),
  };
}
