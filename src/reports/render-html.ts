/**
 * The night sheet as one self-contained page: no script, no request, prints on one sheet of A4 or Letter. System fonts, hairline
 * rules, the title block of a drawing at the top right, the caution at the foot.
 */
import { asIce } from './account.ts';
import { displayFor, fixed, type Display } from './display.ts';
import type { NightSheet } from './night-schema.ts';
import { whyNotKnown } from './not-known.ts';
import { toldWords } from './orders.ts';
import { escaped, plotsOf } from './plots.ts';
import { SHEET_STYLE } from './sheet-style.ts';
import { revisedWords } from './summary.ts';

const MOST_COMMANDS = 7;
/** As many as one page holds; what is left out is counted. */
const MOST_HOURS = 12;
const MOST_TOLD = 3;
const MOST_REASON = 125;

export function renderHtml(sheet: NightSheet): string {
  const show = displayFor(sheet.site);
  const plots = plotsOf(sheet, show);
  const title = `${sheet.site.name}, night of ${sheet.night.date}`;
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'">
<title>${escaped(title)}</title>
<style>${SHEET_STYLE}</style>
</head>
<body>
<main>
<header>${headline(sheet, show)}${titleBlock(sheet, show)}</header>
<figure>${plots.price}${plots.temperatures}${plots.ice}</figure>
<div class="columns">
<section>${iceTable(sheet, show)}${serviceTable(sheet, show)}</section>
<section>${moneyTable(sheet, show)}</section>
</div>
<section>${commandTable(sheet, show)}</section>
<footer>${escaped(sheet.caution)}</footer>
</main>
</body>
</html>
`;
}

function headline(sheet: NightSheet, show: Display): string {
  const [first, ...rest] = sheet.summary.map(escaped);
  const partial =
    sheet.partialBecause === '' ? '' : `<p class="caution">Partial: ${escaped(sheet.partialBecause)}.</p>`;
  const revised = sheet.revision > 1 ? `<p class="caution">Revised: ${escaped(revisedWords(sheet))}</p>` : '';
  return `<div><h1>Night of ${escaped(show.day(sheet.night.start))}</h1><p class="answer">${first}</p><p>${rest.join(' ')}</p>${partial}${revised}</div>`;
}

function titleBlock(sheet: NightSheet, show: Display): string {
  const rows = [
    ['site', sheet.site.name],
    ['night', `${sheet.night.date}${sheet.night.hours === 24 ? '' : `, ${sheet.night.hours} h`}`],
    [
      'sheet',
      `revision ${sheet.revision}, ${sheet.whole ? 'whole' : `partial, ${fixed(sheet.coveredPct, 0)} %`}`,
    ],
    ['issued', `${show.date(sheet.issued)}, ${show.clock(sheet.issued)}`],
    ['clock', sheet.clockDoubtfulMinutes > 0 ? `doubtful for ${sheet.clockDoubtfulMinutes} min` : 'set'],
    ['strategy', sheet.strategy],
  ];
  return `<table class="block">${rows.map(([name, value]) => `<tr><th scope="row">${name}</th><td>${escaped(value)}</td></tr>`).join('')}</table>`;
}

type Row = readonly string[];

/** A ruled table; the first cell of each row is its name, the rest are figures. */
function ruled(caption: string, head: Row, rows: readonly Row[], total = -1): string {
  const cells = (row: Row, tag: 'th' | 'td'): string =>
    row
      .map((cell, at) =>
        at === 0 ? `<th scope="row">${escaped(cell)}</th>` : `<${tag}>${escaped(cell)}</${tag}>`,
      )
      .join('');
  const header =
    head.length === 0
      ? ''
      : `<thead><tr>${head.map((cell) => `<th scope="col">${escaped(cell)}</th>`).join('')}</tr></thead>`;
  const body = rows
    .map((row, at) => `<tr${at === total ? ' class="total"' : ''}>${cells(row, 'td')}</tr>`)
    .join('');
  return `<table><caption>${escaped(caption)}</caption>${header}<tbody>${body}</tbody></table>`;
}

function iceTable(sheet: NightSheet, show: Display): string {
  const { ice, made, melted, leaked, balance } = sheet;
  const mass = (kwh: number): string => show.mass(asIce(kwh).kg);
  const within = (low: number, high: number): string => `${show.heat(low)} to ${show.heat(high)}`;
  const rows = [
    ['at the start', show.heat(ice.startKwh), mass(ice.startKwh), within(ice.startLowKwh, ice.startHighKwh)],
    ['+ made', show.heat(made.kwh), mass(made.kwh), ''],
    ['\u2212 melted for the rooms', show.heat(melted.kwh), mass(melted.kwh), ''],
    ['\u2212 leaked', show.heat(leaked.kwh), mass(leaked.kwh), ''],
    [
      '\u2212 residual',
      show.heat(balance.residualKwh),
      mass(balance.residualKwh),
      whyNotKnown(sheet) !== ''
        ? 'not known'
        : balance.residualPct === null
          ? ''
          : `${fixed(balance.residualPct, 1)} %`,
    ],
    ...(Math.abs(balance.warmedPastUseKwh) < 0.005
      ? []
      : [['+ water past use', show.heat(balance.warmedPastUseKwh), mass(balance.warmedPastUseKwh), '']]),
    ['= at the end', show.heat(ice.endKwh), mass(ice.endKwh), within(ice.endLowKwh, ice.endHighKwh)],
  ];
  const table = ruled(
    'Ice on hand',
    ['', show.heatUnit, `as ice, ${show.massUnit}`, '90 % interval'],
    rows,
    rows.length - 1,
  );
  return `${table}<p>${escaped(balance.sentence)}</p>`;
}

function moneyTable(sheet: NightSheet, show: Display): string {
  const { electricity, comparisons, cop } = sheet;
  const periods = electricity.byPeriod.map((one) => [
    one.period || 'unnamed',
    fixed(one.machineKwh, 2),
    fixed(one.pumpKwh + one.fanKwh, 2),
    one.meanPrice === null ? '' : show.price(one.meanPrice),
    show.money(one.money),
  ]);
  const together = [
    'together',
    fixed(electricity.machineKwh, 2),
    fixed(electricity.pumpKwh + electricity.fanKwh, 2),
    '',
    show.money(electricity.money),
  ];
  const first = ruled(
    'Electricity, kWh',
    ['', 'machine', 'pump, fan', `${show.currency}/kWh`, show.currency],
    [...periods, together],
    periods.length,
  );
  const notKnown = whyNotKnown(sheet);
  const second =
    comparisons.length === 0 || notKnown !== ''
      ? notKnown === ''
        ? ''
        : `<p>Saved: not known, ${escaped(notKnown)}.</p>`
      : ruled(
          'The same night with',
          ['', `${show.currency}, like for like`, 'saved', `unmet ${show.heatUnit}`],
          comparisons.map((one) => [
            one.strategy.replace('-', ' '),
            show.money(one.likeForLikeMoney),
            show.money(one.savedMoney),
            show.heat(one.unmetKwh),
          ]),
        );
  const later = Math.max(0, cop.byHour.length - MOST_HOURS);
  const hours = cop.byHour
    .slice(0, MOST_HOURS)
    .map((one) => `${show.clock(one.at).slice(0, 2)}\u202fh\u00a0${fixed(one.cop, 2)}`);
  const overall =
    cop.machine === null || cop.withPumpAndFan === null
      ? 'The machine did not run.'
      : `COP ${fixed(cop.machine, 2)}, with pump and fan ${fixed(cop.withPumpAndFan, 2)}. By hour: ${hours.join(', ')}${later > 0 ? `; ${later} later hours are in the text form` : ''}.`;
  return `${first}${second}<p>${escaped(overall)}</p>`;
}

function serviceTable(sheet: NightSheet, show: Display): string {
  const { delivered, comfort, weather, forecast } = sheet;
  const temp = (value: number | null): string =>
    value === null ? '\u2013' : `${show.temperature(value)} ${show.temperatureUnit}`;
  const heat = (value: number | null): string =>
    value === null ? 'not known' : `${show.heat(value)} ${show.heatUnit}`;
  const load = forecast?.load ?? null;
  const outdoor = forecast?.outdoor ?? null;
  const rows: Row[] = [
    ['delivered', heat(delivered.kwh)],
    ['of it latent', heat(delivered.latentKwh)],
    [
      'condensate',
      delivered.condensateKg === null ? 'not known' : `${show.mass(delivered.condensateKg)} ${show.massUnit}`,
    ],
    [
      'warm hours',
      `${show.degreeHours(comfort.warmKh)} ${show.degreeHourUnit}, ${Math.round(comfort.warmMinutes)} min`,
    ],
    ['warmest room, limit', `${temp(comfort.warmestC)}, ${temp(comfort.limitC)}`],
    ['outdoor mean, highest', `${temp(weather.outdoorMeanC)}, ${temp(weather.outdoorMaxC)}`],
    ...(load === null
      ? []
      : [
          [
            'load forecast at noon, came',
            `${show.heat(load.expectedKwh)}, ${show.heat(load.cameKwh)} ${show.heatUnit}`,
          ],
        ]),
    ...(outdoor === null
      ? []
      : [
          [
            'outdoor forecast off by',
            `${show.difference(outdoor.meanAbsK)} ${show.differenceUnit}, ${fixed(outdoor.insidePct, 0)} % in its 80 % band`,
          ],
        ]),
  ];
  return ruled('Cooling, comfort, forecast', [], rows);
}

function commandTable(sheet: NightSheet, show: Display): string {
  const shown = sheet.commands.slice(0, MOST_COMMANDS);
  const more = sheet.commands.length - shown.length;
  const commands = shown
    .map(
      (one) =>
        `<tr><th scope="row">${show.clock(one.from)}</th><td>${escaped(clipped(`${one.command}: ${one.reason}`))}</td></tr>`,
    )
    .join('');
  const table = `<table class="orders"><caption>Commands and their reasons</caption><tbody>${commands}</tbody></table>`;
  return `${table}<p>${escaped([more > 0 ? `And ${more} more changes.` : '', ...notes(sheet, show)].filter(Boolean).join(' '))}</p>`;
}

/** A long reason is cut on paper, so that the sheet stays one page; the JSON form has it whole. */
function clipped(text: string): string {
  return text.length <= MOST_REASON ? text : `${text.slice(0, MOST_REASON - 1).trimEnd()}\u2026`;
}

function notes(sheet: NightSheet, show: Display): string[] {
  const held = sheet.interlocks.slice(0, 3).map((one) => `${one.what} (${Math.round(one.minutes)} min)`);
  const wishes = sheet.wishes
    .slice(0, 3)
    .map((one) => `${one.wish} ${show.clock(one.from)} to ${show.clock(one.to)}`);
  const told = toldWords(sheet, (instant) => show.clock(instant));
  const earlier = Math.max(0, told.length - MOST_TOLD);
  const silent = sheet.probes.filter((one) => one.staleMinutes >= 1).slice(0, 4);
  const checked = sheet.probes.filter((one) => one.errorAtIcePointK !== null).slice(0, 4);
  const aside = sheet.probes.filter((one) => one.setAside !== null).slice(0, 3);
  return [
    listed('Held back', held),
    listed('Wishes', wishes),
    listed('Told', [
      ...(earlier > 0 ? [`${earlier} earlier, in the text form`] : []),
      ...told.slice(-MOST_TOLD),
    ]),
    listed(
      'Silent',
      silent.map((one) => `${one.point} ${Math.round(one.staleMinutes)} min`),
    ),
    listed(
      'Error at the ice point',
      checked.map(
        (one) => `${one.point} ${show.difference(one.errorAtIcePointK ?? 0, 2)} ${show.differenceUnit}`,
      ),
    ),
    listed(
      'Set aside',
      aside.map((one) => `${one.point} (${one.setAside})`),
    ),
  ];
}

function listed(name: string, items: readonly string[]): string {
  return items.length === 0 ? '' : `${name}: ${items.join(', ')}.`;
}
