/** One sentence for people on what a forecast rests on. */
export interface Knowledge {
  readonly weatherDays: number;
  /** null without a hub's forecast. */
  readonly hub: { readonly sdK: number; readonly issues: number; readonly weight: number } | null;
  readonly cabinDays: number;
  readonly refusedDays: number;
  readonly sun: 'panels' | 'daily range';
}

/** Days of own weather at which the hourly bins stand on their own. */
const GOOD_DAYS = 30;

export function knowsSentence(knowledge: Knowledge): string {
  const parts = [weatherWords(knowledge.weatherDays), hubWords(knowledge.hub), cabinWords(knowledge)];
  return `Rests on ${listed(parts.filter((part) => part !== ''))}; sun judged by ${sunWords(knowledge.sun)}.`;
}

const days = (count: number): string => {
  const whole = Math.floor(count);
  return whole === 1 ? '1 day' : `${whole} days`;
};

function weatherWords(count: number): string {
  if (count < 1) return "the site's design day, moved to the readings so far";
  if (count < GOOD_DAYS) return `${days(count)} of its own weather (${GOOD_DAYS} make it good)`;
  return `${days(count)} of its own weather`;
}

function hubWords(hub: Knowledge['hub']): string {
  if (!hub) return '';
  if (hub.issues === 0) return "a hub's forecast not compared with anything yet";
  const share = Math.round(hub.weight * 100);
  return `a hub's forecast (usually ${hub.sdK.toFixed(1)} K off a day ahead, weighs ${share} %)`;
}

function cabinWords({ cabinDays, refusedDays }: Knowledge): string {
  if (cabinDays < 1) return 'the cabin as the site file describes it';
  const left = refusedDays > 0 ? `, ${days(refusedDays)} with open windows left out` : '';
  return `${days(cabinDays)} of how the cabin answers${left}`;
}

const sunWords = (sun: Knowledge['sun']): string =>
  sun === 'panels' ? 'panel power' : 'the daily range of temperature';

function listed(parts: readonly string[]): string {
  if (parts.length < 2) return parts.join('');
  return `${parts.slice(0, -1).join(', ')} and ${parts[parts.length - 1]}`;
}
