/** Who is home and what they do: home hours of the site file with late arrivals, early departures and evenings out. */
import type { SiteConfig } from '../config.ts';
import type { Random } from '../numerics/random.ts';
import { DAY_MS, localMinuteOfDay, MINUTE_MS, toWall, utcOffsetMs } from '../time.ts';

const WEEKDAYS = ['SU', 'MO', 'TU', 'WE', 'TH', 'FR', 'SA'] as const;
/** Minutes by which people come and go early or late (standard deviation); no source. */
const SHIFT_MIN = 30;
const LOOK_MS = 5 * MINUTE_MS;

interface DayHabits {
  readonly comesLateMin: number;
  readonly leavesLateMin: number;
  readonly away: boolean;
}

const minutes = (clock: string): number => Number(clock.slice(0, 2)) * 60 + Number(clock.slice(3));

export class Household {
  private readonly zone: string;
  private readonly home: SiteConfig['cabin']['home'];
  private readonly random: Random;
  private readonly awayChance: number;
  private habits: DayHabits = { comesLateMin: 0, leavesLateMin: 0, away: false };
  private habitsDay = Number.NaN;
  private lookedSlot = Number.NaN;
  private lookedHome = false;

  constructor(site: SiteConfig, random: Random, awayChance: number) {
    this.zone = site.site.zone;
    this.home = site.cabin.home;
    this.random = random;
    this.awayChance = awayChance;
  }

  /** Whether somebody is home, looked at in steps of five minutes. */
  isHome(atMs: number): boolean {
    const slot = Math.floor(atMs / LOOK_MS);
    if (slot !== this.lookedSlot) {
      this.lookedSlot = slot;
      this.lookedHome = this.lookHome(slot * LOOK_MS);
    }
    return this.lookedHome;
  }

  /** Habits change at local noon, so an evening and its night belong together. */
  private lookHome(atMs: number): boolean {
    this.drawHabits(atMs);
    const minute = localMinuteOfDay(this.zone, atMs);
    const weekday = toWall(this.zone, atMs).weekday;
    return this.home.some((span) => {
      const from = minutes(span.from) + this.habits.comesLateMin;
      const to = minutes(span.to) + this.habits.leavesLateMin;
      const overnight = minutes(span.to) <= minutes(span.from);
      const startedToday = span.days.includes(WEEKDAYS[weekday]);
      const startedYesterday = span.days.includes(WEEKDAYS[(weekday + 6) % 7]);
      if (this.habits.away && minute > 720 && minute < 1380) return false;
      if (!overnight) return startedToday && minute >= from && minute < to;
      return (startedToday && minute >= from) || (startedYesterday && minute < to);
    });
  }

  private drawHabits(atMs: number): void {
    const day = Math.floor((atMs + utcOffsetMs(this.zone, atMs) - DAY_MS / 2) / DAY_MS);
    if (day === this.habitsDay) return;
    const draw = this.random.fork(String(day));
    this.habitsDay = day;
    this.habits = {
      comesLateMin: SHIFT_MIN * draw.normal(),
      leavesLateMin: SHIFT_MIN * draw.normal(),
      away: draw.next() < this.awayChance,
    };
  }

  /** Part of the mean electric load of the house at this hour; its mean over a day is about 1. */
  loadShape(atMs: number, home: boolean): number {
    const hour = localMinuteOfDay(this.zone, atMs) / 60;
    const evening = Math.exp(-(((hour - 20.5) / 2) ** 2));
    const morning = Math.exp(-(((hour - 8) / 1.2) ** 2));
    return 0.55 + (home ? 1.6 * evening + 0.9 * morning + 0.15 : 0);
  }
}
