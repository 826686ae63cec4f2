/** The night sheet for a terminal, 80 columns. */
import { asIce, iceItself } from './account.ts';
import { displayFor, fixed, type Display } from './display.ts';
import type { NightSheet } from './night-schema.ts';
import { whyNotKnown } from './not-known.ts';
import { toldWords } from './orders.ts';
import { bothEnds, heading, noted, rule, table, wrapped } from './paper.ts';
import { stripOf } from './strip.ts';
import { revisedWords } from './summary.ts';

const MARGIN = 12;
const MOST_COMMANDS = 14;

/** The whole sheet; ends with a line break. */
export function renderText(sheet: NightSheet): string {
  const show = displayFor(sheet.site);
  const lines = [
    ...titleBlock(sheet, show),
    '',
    ...sheet.summary.flatMap((sentence) => wrapped(sentence)),
    ...(sheet.partialBecause === '' ? [] : noted('PARTIAL', `${sheet.partialBecause}.`, MARGIN)),
    ...(sheet.revision > 1 ? noted('REVISED', revisedWords(sheet), MARGIN) : []),
    '',
    ...stripOf(sheet, show),
    '',
    heading('ice and its balance'),
    ...iceLines(sheet, show),
    heading('electricity and money'),
    ...electricityLines(sheet, show),
    heading('cooling and comfort'),
    ...serviceLines(sheet, show),
    heading('forecast at noon against what came'),
    ...forecastLines(sheet, show),
    heading('commands'),
    ...commandLines(sheet, show),
    heading('probes and learned figures'),
    ...probeLines(sheet, show),
    rule(),
    ...wrapped(sheet.caution),
  ];
  return `${lines.map((line) => line.trimEnd()).join('\n')}\n`;
}

function titleBlock(sheet: NightSheet, show: Display): string[] {
  const { night } = sheet;
  const hours = night.hours === 24 ? '' : ` (${night.hours} h)`;
  return [
    bothEnds('NIGHT SHEET', sheet.site.name),
    bothEnds(show.day(night.start), `night ${night.date}, revision ${sheet.revision}`),
    bothEnds(
      `noon to noon${hours}, ${sheet.whole ? 'whole' : `partial, ${fixed(sheet.coveredPct, 0)} % recorded`}`,
      `issued ${show.date(sheet.issued)} ${show.clock(sheet.issued)}`,
    ),
    ...(sheet.clockDoubtfulMinutes > 0
      ? [bothEnds('', `clock doubtful for ${sheet.clockDoubtfulMinutes} min`)]
      : []),
    rule(),
  ];
}

function iceLines(sheet: NightSheet, show: Display): string[] {
  const { ice, balance, made, melted, leaked } = sheet;
  const mass = (kwh: number): string => show.mass(asIce(kwh).kg);
  const within = (low: number, high: number): string => `${show.heat(low)} to ${show.heat(high)}`;
  const rows = [
    ['', show.heatUnit, `as ice, ${show.massUnit}`, '90 % interval'],
    [
      'on hand at the start',
      show.heat(ice.startKwh),
      mass(ice.startKwh),
      within(ice.startLowKwh, ice.startHighKwh),
    ],
    ['+ made', show.heat(made.kwh), mass(made.kwh), ''],
    ['- melted for the rooms', show.heat(melted.kwh), mass(melted.kwh), ''],
    ['- leaked', show.heat(leaked.kwh), mass(leaked.kwh), ''],
    ['- residual', show.heat(balance.residualKwh), mass(balance.residualKwh), residualShare(sheet)],
    ...(Math.abs(balance.warmedPastUseKwh) < 0.005
      ? []
      : [['+ water past use', show.heat(balance.warmedPastUseKwh), mass(balance.warmedPastUseKwh), '']]),
    ['= on hand at the end', show.heat(ice.endKwh), mass(ice.endKwh), within(ice.endLowKwh, ice.endHighKwh)],
  ];
  return [
    ...table(rows),
    ...wrapped(iceItself(sheet, show)),
    ...wrapped(balance.sentence),
    ...heardOutLine(sheet, show),
  ];
}

function residualShare(sheet: NightSheet): string {
  const { residualPct } = sheet.balance;
  const why = whyNotKnown(sheet);
  if (why !== '') return 'share not known';
  return residualPct === null ? '' : `${fixed(residualPct, 1)} % of throughput`;
}

function heardOutLine(sheet: NightSheet, show: Display): string[] {
  const { heardOutKwh, heardOutHoursPct } = sheet.balance;
  if (heardOutKwh === null) return [];
  return wrapped(
    `Heard flow and temperatures alone give ${show.heat(heardOutKwh)} ${show.heatUnit} melted (${fixed(heardOutHoursPct, 0)} % of the time heard).`,
  );
}

function electricityLines(sheet: NightSheet, show: Display): string[] {
  const { electricity, cop } = sheet;
  const rows = [
    ['', 'machine kWh', 'pump kWh', 'fan kWh', `${show.currency}/kWh`, show.currency],
    ...electricity.byPeriod.map((period) => [
      period.period || 'unnamed',
      fixed(period.machineKwh, 2),
      fixed(period.pumpKwh, 2),
      fixed(period.fanKwh, 2),
      period.meanPrice === null ? '' : show.price(period.meanPrice),
      show.money(period.money),
    ]),
    [
      'together',
      fixed(electricity.machineKwh, 2),
      fixed(electricity.pumpKwh, 2),
      fixed(electricity.fanKwh, 2),
      '',
      show.money(electricity.money),
    ],
  ];
  return [
    ...table(rows),
    ...electricityNotes(sheet),
    ...comparisonLines(sheet, show),
    ...copLines(cop, show),
  ];
}

function electricityNotes(sheet: NightSheet): string[] {
  const { electricity, supply } = sheet;
  const notes = [
    electricity.nominal.length > 0
      ? `${electricity.nominal.join(' and ')} taken at nominal power, no plug meter`
      : '',
    electricity.unpricedKwh > 0 ? `${fixed(electricity.unpricedKwh, 2)} kWh had no price` : '',
    electricity.machineUnheardMinutes > 5
      ? `machine power unheard for ${Math.round(electricity.machineUnheardMinutes)} min`
      : '',
    supply.panelKwh === null ? '' : `panels gave ${fixed(supply.panelKwh, 2)} kWh`,
    supply.generatorKwh === null ? '' : `generator ${fixed(supply.generatorKwh, 2)} kWh`,
    supply.batteryStartPct === null || supply.batteryEndPct === null
      ? ''
      : `battery ${fixed(supply.batteryStartPct, 0)} to ${fixed(supply.batteryEndPct, 0)} %`,
  ].filter(Boolean);
  return notes.length === 0 ? [] : wrapped(`${capital(notes.join('; '))}.`);
}

function comparisonLines(sheet: NightSheet, show: Display): string[] {
  if (sheet.comparisons.length === 0) return notKnownLines(sheet);
  return table([
    ['the same night with', `${show.currency}, like for like`, 'saved', `unmet ${show.heatUnit}`],
    ...sheet.comparisons.map((one) => [
      one.strategy.replace('no-storage', 'no storage'),
      show.money(one.likeForLikeMoney),
      show.money(one.savedMoney),
      show.heat(one.unmetKwh),
    ]),
  ]);
}

function notKnownLines(sheet: NightSheet): string[] {
  const why = whyNotKnown(sheet);
  return why === '' ? [] : noted('saved', `not known: ${why}`, MARGIN);
}

function copLines(cop: NightSheet['cop'], show: Display): string[] {
  if (cop.machine === null) return ['COP: the machine did not run.'];
  const overall = `${fixed(cop.machine, 2)} machine, ${cop.withPumpAndFan === null ? '-' : fixed(cop.withPumpAndFan, 2)} with pump and fan`;
  const hours = cop.byHour.map((hour) => `${show.clock(hour.at).slice(0, 2)} h ${fixed(hour.cop, 2)}`);
  return noted('COP', `${overall}; by hour ${hours.join(', ')}`, MARGIN);
}

function serviceLines(sheet: NightSheet, show: Display): string[] {
  const { delivered, comfort, weather } = sheet;
  const unit = show.heatUnit;
  const cooling =
    delivered.kwh === null
      ? 'not known: no flow was heard'
      : `${show.heat(delivered.kwh)} ${unit}` +
        (delivered.latentKwh === null || delivered.sensibleKwh === null || delivered.condensateKg === null
          ? ''
          : `, sensible ${show.heat(delivered.sensibleKwh)}, latent ${show.heat(delivered.latentKwh)} (condensate ${show.mass(delivered.condensateKg)} ${show.massUnit})`) +
        (delivered.heardPct < 99 ? `, known for ${fixed(delivered.heardPct, 0)} % of the time` : '');
  const temp = (value: number | null): string => (value === null ? '-' : show.temperature(value));
  return [
    ...noted('delivered', cooling, MARGIN),
    ...noted(
      'warm hours',
      `${show.degreeHours(comfort.warmKh)} ${show.degreeHourUnit} above ${temp(comfort.limitC)} ${show.temperatureUnit}, ${Math.round(comfort.warmMinutes)} min; warmest ${temp(comfort.warmestC)} ${show.temperatureUnit}`,
      MARGIN,
    ),
    ...noted(
      'outdoor',
      `mean ${temp(weather.outdoorMeanC)}, ${temp(weather.outdoorMinC)} to ${temp(weather.outdoorMaxC)} ${show.temperatureUnit}`,
      MARGIN,
    ),
  ];
}

function forecastLines(sheet: NightSheet, show: Display): string[] {
  const { forecast } = sheet;
  if (forecast === null) return ['There was no plan to hold against the night.'];
  const { load, outdoor } = forecast;
  const lines: string[] = [];
  if (load !== null) {
    const error =
      load.errorPct === null
        ? ''
        : `, forecast ${fixed(Math.abs(load.errorPct), 0)} % ${load.errorPct >= 0 ? 'high' : 'low'}`;
    const yesterday = load.yesterdayKwh === null ? '' : `; the day before ${show.heat(load.yesterdayKwh)}`;
    lines.push(
      ...noted(
        'load',
        `${show.heat(load.expectedKwh)} ${show.heatUnit} (${show.heat(load.lowKwh)} to ${show.heat(load.highKwh)}), came ${show.heat(load.cameKwh)} ${load.cameFrom}${error}, ${load.inside ? 'inside' : 'outside'} the band${yesterday}`,
        MARGIN,
      ),
    );
  }
  if (outdoor !== null) {
    const base =
      outdoor.yesterdayMeanAbsK === null
        ? ''
        : `; yesterday again would have been off by ${show.difference(outdoor.yesterdayMeanAbsK)}`;
    const unit = show.differenceUnit;
    lines.push(
      ...noted(
        'outdoor',
        `off by ${show.difference(outdoor.meanAbsK)} ${unit} on the mean (${show.difference(outdoor.meanErrorK)} bias, CRPS ${show.difference(outdoor.crpsK, 2)}), ${fixed(outdoor.insidePct, 0)} % of slots inside the 80 % band${base}`,
        MARGIN,
      ),
    );
  }
  return [...lines, ...noted('rests on', forecast.knows, MARGIN)];
}

function commandLines(sheet: NightSheet, show: Display): string[] {
  const shown = sheet.commands.slice(0, MOST_COMMANDS);
  const more = sheet.commands.length - shown.length;
  return [
    ...shown.flatMap((one) =>
      noted(
        show.clock(one.from),
        `${one.command}: ${one.reason}${one.heldBackBy === '' ? '' : ` Held back: ${one.heldBackBy}`}`,
        MARGIN - 4,
      ),
    ),
    ...(more > 0 ? [`and ${more} more changes, in the JSON form`] : []),
    ...sheet.wishes.flatMap((one) =>
      noted('wish', `${one.wish} from ${show.clock(one.from)} to ${show.clock(one.to)}`, MARGIN - 4),
    ),
    ...toldWords(sheet, (instant) => show.clock(instant)).flatMap((words) =>
      noted('told', words, MARGIN - 4),
    ),
    ...sheet.interlocks.flatMap((one) =>
      noted(
        'spoke',
        `${one.what} (${one.times} time${one.times === 1 ? '' : 's'}, ${Math.round(one.minutes)} min, first ${show.clock(one.first)})`,
        MARGIN - 4,
      ),
    ),
  ];
}

function probeLines(sheet: NightSheet, show: Display): string[] {
  const checked = sheet.probes.filter((one) => one.errorAtIcePointK !== null);
  const silent = sheet.probes.filter((one) => one.staleMinutes >= 1);
  const aside = sheet.probes.filter((one) => one.setAside !== null);
  const unit = show.differenceUnit;
  const errors = checked.map(
    (one) => `${one.point} ${signed(show.difference(one.errorAtIcePointK ?? 0, 2))}`,
  );
  const lines = [
    ...noted(
      'ice point',
      errors.length === 0 ? 'no probe was checked' : `${errors.join(', ')} ${unit}`,
      MARGIN,
    ),
    ...noted(
      'silent',
      silent.length === 0
        ? 'none'
        : silent.map((one) => `${one.point} ${Math.round(one.staleMinutes)} min`).join(', '),
      MARGIN,
    ),
    ...(aside.length === 0
      ? []
      : noted('set aside', aside.map((one) => `${one.point} (${one.setAside})`).join(', '), MARGIN)),
    ...(sheet.gaps.length === 0
      ? []
      : noted(
          'gaps',
          sheet.gaps.map((gap) => `${show.clock(gap.from)} to ${show.clock(gap.to)}`).join(', '),
          MARGIN,
        )),
  ];
  const learned = sheet.learned.map((one) => learnedWords(one, show));
  return [...lines, ...(learned.length === 0 ? [] : noted('learned', learned.join(', '), MARGIN))];
}

/** "heat-leak 2.13 ± 0.10 W/K". */
function learnedWords({ name, value, sd, unit }: NightSheet['learned'][number], show: Display): string {
  const shown = show.figure(value, unit);
  const within = sd === null ? '' : ` \u00b1 ${show.figure(sd, unit).value.toPrecision(2)}`;
  return `${name.replaceAll('-', ' ')} ${shown.value.toPrecision(3)}${within} ${shown.unit}`.trimEnd();
}

function signed(text: string): string {
  return text.startsWith('\u2212') || Number(text) === 0 ? text : `+${text}`;
}

function capital(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}
