/** The sheet in two or three sentences: what an owner or installer reads first. */
import type { Display } from './display.ts';
import type { NightSheet } from './night-schema.ts';
import { whyNotKnown } from './not-known.ts';

type Figures = Omit<NightSheet, 'summary'>;

export function summaryOf(sheet: Figures, show: Display): string[] {
  return [iceSentence(sheet, show), moneySentence(sheet, show), comfortSentence(sheet, show)];
}

function iceSentence(sheet: Figures, show: Display): string {
  const { made, melted, leaked, ice } = sheet;
  return (
    `Made ${show.heat(made.kwh)}, melted ${show.heat(melted.kwh)} and leaked ${show.heat(leaked.kwh)} ${show.heatUnit} of ice; ` +
    `${show.heat(ice.endKwh)} on hand at the end, ${show.heat(ice.lowestKwh)} at the lowest (${show.clock(ice.lowestAt)}).`
  );
}

function moneySentence(sheet: Figures, show: Display): string {
  const { electricity, comparisons } = sheet;
  const spent = `${electricity.totalKwh.toFixed(2)} kWh of electricity for ${show.money(electricity.money)} ${show.currency}`;
  const against = comparisons.find((one) => one.strategy === 'no-storage') ?? comparisons.at(0);
  const notKnown = whyNotKnown(sheet);
  if (notKnown !== '') return `${spent}; what the bank saved is not known: ${notKnown}.`;
  if (!against) return `${spent}.`;
  const name = against.strategy === 'no-storage' ? 'no storage' : against.strategy;
  const amount = `${show.money(Math.abs(against.savedMoney))} ${show.currency}`;
  const short =
    against.unmetKwh >= 0.05
      ? `, which would have left ${show.heat(against.unmetKwh)} ${show.heatUnit} of cooling unserved`
      : '';
  return `${spent}, ${amount} ${against.savedMoney >= 0 ? 'less' : 'more'} than with ${name}${short}.`;
}

function comfortSentence(sheet: Figures, show: Display): string {
  const { comfort } = sheet;
  if (comfort.warmestC === null || comfort.warmestAt === null)
    return 'No room temperature was heard while somebody was home.';
  const warmest = `at most ${show.temperature(comfort.warmestC)} ${show.temperatureUnit} at ${show.clock(comfort.warmestAt)}`;
  if (!(comfort.warmKh > 0)) return `Rooms stayed within the limit while somebody was home, ${warmest}.`;
  return `${show.degreeHours(comfort.warmKh)} ${show.degreeHourUnit} above the limit in ${Math.round(comfort.warmMinutes)} minutes while somebody was home, ${warmest}.`;
}

/** What a sheet that was written again says of that. */
export function revisedWords({ revision, revisedBecause }: NightSheet): string {
  const older = revision === 2 ? 'revision 1 is kept' : `revisions 1 to ${revision - 1} are kept`;
  return `revision ${revision}, ${revisedBecause || 'written again'}; ${older}.`;
}
