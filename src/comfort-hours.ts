/** Which comfort limit holds when, and when somebody is home: the site file's clock times, read once for all rooms. */
import type { CabinConfig, ComfortConfig } from './config.ts';
import { localMinuteOfDay, minuteOfClock, toWall, withinClock } from './time.ts';

const WEEKDAYS = ['SU', 'MO', 'TU', 'WE', 'TH', 'FR', 'SA'] as const;

/** The comfort limit at an instant, °C: the sleeping limit in sleeping hours, where the site has one. */
export function limitAt(comfort: ComfortConfig, zone: string, atMs: number): number {
  const asleep = withinClock(localMinuteOfDay(zone, atMs), comfort.sleepingFrom, comfort.sleepingTo);
  return asleep ? (comfort.sleepingLimitC ?? comfort.limitC) : comfort.limitC;
}

/** Whether somebody is expected home. A stretch that crosses midnight belongs to the day on which it begins. */
export function expectedHome(cabin: CabinConfig, zone: string, atMs: number): boolean {
  const { weekday } = toWall(zone, atMs);
  const minute = localMinuteOfDay(zone, atMs);
  return cabin.home.some(({ days, from, to }) => {
    const start = minuteOfClock(from);
    const crosses = minuteOfClock(to) <= start;
    if (!withinClock(minute, from, to)) return false;
    const beganYesterday = crosses && minute < start;
    return days.includes(WEEKDAYS[(weekday + (beganYesterday ? 6 : 0)) % 7]);
  });
}
