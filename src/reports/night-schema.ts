/**
 * The night sheet as it is stored, published and served: one shape, from which come the type and the published JSON
 * Schema. Energies kWh, temperatures °C, money in the site's currency, times RFC 3339 UTC, whatever units the site shows.
 */
import * as z from 'zod';
import { COMMANDS, MODES, STRATEGIES, TOLD, WISHES } from '../commands.ts';

export const NIGHT_SHEET_SCHEMA = 'rimehold/night-sheet/1';

const number = z.number();
const maybe = z.number().nullable();
const maybeText = z.string().nullable();
const instant = z.iso.datetime().describe('RFC 3339, UTC');
const describe = <T extends z.ZodType>(type: T, what: string): T => type.describe(what);

const energyAndMass = z.strictObject({
  kwh: number,
  kg: describe(number, 'the same heat as a mass of ice'),
});

const balance = z.strictObject({
  inKwh: describe(number, 'heat that the ice machine took out of the bank'),
  outKwh: describe(number, 'heat that the melt-water loop brought into the bank'),
  leakKwh: describe(number, 'heat that leaked into the bank'),
  changeKwh: describe(
    number,
    'cold at the end less at the start, that of water too warm to use counted below zero',
  ),
  warmedPastUseKwh: describe(
    number,
    'how much more heat the water holds at the end above the useful temperature',
  ),
  residualKwh: describe(number, 'in - out - leak - change: cold that no flux accounts for'),
  residualPct: describe(maybe, 'of the throughput, the larger of in and out + leak'),
  uncertaintyKwh: describe(number, 'what the intervals of ice at start and end leave open, 90 %'),
  whileKwh: z
    .strictObject({ charging: number, discharging: number, resting: number, gaps: number })
    .describe('where the residual arose'),
  heardOutKwh: describe(maybe, 'heat brought in, from heard flow and temperatures alone'),
  heardOutHoursPct: describe(number, 'of the discharging hours in which these were heard'),
  verdict: z.enum(['closes', 'within-estimate', 'open', 'unknown']),
  culprit: describe(z.string(), 'where to look when it does not close; empty otherwise'),
  sentence: z.string(),
});

const period = z.strictObject({
  period: z.string(),
  machineKwh: number,
  pumpKwh: number,
  fanKwh: number,
  meanPrice: maybe,
  money: number,
});

const comparison = z.strictObject({
  strategy: z.enum(['no-storage', 'storage-priority', 'chiller-priority', 'timetable']),
  money: number,
  endKwh: number,
  unmetKwh: describe(number, 'cooling that was delivered in truth and that this way could not have'),
  likeForLikeMoney: describe(number, 'money, the change of ice valued as on the night itself'),
  savedMoney: describe(number, 'what the night as run cost less than this, like for like'),
  how: z.string(),
});

const forecast = z.strictObject({
  made: instant,
  knows: z.string(),
  outdoor: z
    .strictObject({
      meanErrorK: describe(number, 'forecast less what came'),
      meanAbsK: number,
      crpsK: describe(number, 'twice the mean pinball loss of the 10th, 50th and 90th percentile'),
      insidePct: describe(number, 'of slots between the 10th and 90th percentile; 80 is right'),
      yesterdayMeanAbsK: describe(maybe, 'had yesterday been taken for today'),
      slots: number,
    })
    .nullable(),
  load: z
    .strictObject({
      expectedKwh: number,
      lowKwh: number,
      highKwh: number,
      cameKwh: number,
      cameFrom: z.enum(['delivered', 'melted']),
      errorPct: maybe,
      inside: z.boolean(),
      yesterdayKwh: maybe,
    })
    .nullable(),
});

const command = z.strictObject({
  from: instant,
  to: instant,
  command: z.enum(COMMANDS),
  requested: z.enum(COMMANDS),
  reason: z.string(),
  heldBackBy: z.string(),
});

const probe = z.strictObject({
  point: z.string(),
  staleMinutes: number,
  errorAtIcePointK: maybe,
  errorSdK: maybe,
  checked: instant.nullable(),
  setAside: z.string().nullable(),
});

const learned = z.strictObject({ name: z.string(), value: number, sd: maybe, unit: z.string() });

const column = z.array(maybe);
const trace = z
  .strictObject({
    stepMs: number,
    start: instant,
    price: column,
    outdoorC: column,
    roomC: column,
    limitC: column,
    iceKwh: column,
    iceLowKwh: column,
    iceHighKwh: column,
    mode: z.array(z.enum(MODES).nullable()),
  })
  .describe('the night in quarter hours, for the plots');

export const FIGURES = [
  'copAtRating',
  'iceMakingAtRatingW',
  'machinePowerAtRatingW',
  'coolantBelowZeroK',
  'meltWPerK',
  'coilNtu',
  'flowLPerMin',
  'pumpPowerW',
  'loadPerDegree',
  'roomFollowsPerH',
] as const;
export type FigureName = (typeof FIGURES)[number];

const heatSums = z.strictObject({
  madeKwh: describe(number, 'by the catalogue, from coolant and outdoor temperature'),
  meltedKwh: describe(number, 'by the loop as heard'),
  surroundKh: describe(number, 'air round the bank above 0 \u00b0C'),
  unheardHours: describe(number, 'hours of which one of these is not known'),
});

const refill = z
  .strictObject({
    chargeEnd: describe(instant.nullable(), 'of the last charge of an hour and a half or more'),
    until: describe(heatSums, 'from noon to the end of that charge, or of the night'),
    after: describe(heatSums, 'from there to noon'),
    curve: z
      .array(z.strictObject({ madeKwh: number, belowZeroK: number, outdoorC: number }))
      .describe(
        'how the coolant fell as ice was made, quarter hours counted back from the end of the charge; empty if it did not get to ice',
      ),
  })
  .describe('what the leak is read from over several nights: what a charge has to make good');

const probeCheck = z.strictObject({
  point: z.string(),
  where: z.enum(['beside-ice', 'coolant-at-rest']),
  readC: number,
  errorK: describe(number, 'standard error of that reading'),
});

export const nightSheetSchema = z
  .strictObject({
    schema: z.literal(NIGHT_SHEET_SCHEMA),
    site: z.strictObject({
      id: z.string(),
      name: z.string(),
      zone: z.string(),
      currency: z.string(),
      units: z.enum(['SI', 'IP']),
    }),
    night: z.strictObject({ date: z.iso.date(), start: instant, end: instant, hours: number }),
    summary: z.array(z.string()).describe('the night in a few sentences, in the units of the site'),
    revision: z.int().min(1),
    revisedBecause: describe(z.string(), 'empty for the first; every revision is kept'),
    issued: instant,
    whole: z.boolean(),
    partialBecause: z.string(),
    coveredPct: number,
    gaps: z.array(z.strictObject({ from: instant, to: instant, minutes: number })),
    clockDoubtfulMinutes: number,
    strategy: z.enum(STRATEGIES),
    ice: z.strictObject({
      startKwh: number,
      startLowKwh: number,
      startHighKwh: number,
      endKwh: number,
      endLowKwh: number,
      endHighKwh: number,
      startKg: number,
      endKg: number,
      lowestKwh: number,
      lowestAt: instant,
      mostKg: number,
    }),
    made: energyAndMass,
    melted: energyAndMass,
    leaked: energyAndMass,
    balance,
    electricity: z.strictObject({
      machineKwh: number,
      pumpKwh: number,
      fanKwh: number,
      totalKwh: number,
      money: number,
      unpricedKwh: number,
      machineUnheardMinutes: number,
      nominal: z
        .array(z.enum(['pump', 'fan']))
        .describe('machines without a power point, taken at nominal power'),
      byPeriod: z.array(period),
    }),
    supply: z.strictObject({
      panelKwh: maybe,
      generatorKwh: maybe,
      gridKwh: maybe,
      batteryStartPct: maybe,
      batteryEndPct: maybe,
    }),
    comparisons: z.array(comparison),
    iceWorthMoneyPerKwh: describe(maybe, 'what a change of ice is valued at in the comparisons'),
    cop: z.strictObject({
      machine: maybe,
      withPumpAndFan: maybe,
      byHour: z.array(
        z.strictObject({ at: instant, cop: number, madeKwh: number, machineKwh: number, outdoorC: maybe }),
      ),
    }),
    delivered: z.strictObject({
      kwh: maybe,
      sensibleKwh: maybe,
      latentKwh: maybe,
      condensateKg: maybe,
      heardPct: describe(number, 'of the discharging hours in which it was known'),
    }),
    comfort: z.strictObject({
      warmKh: number,
      warmMinutes: number,
      warmestC: maybe,
      warmestAt: instant.nullable(),
      limitC: maybe,
    }),
    weather: z.strictObject({ outdoorMeanC: maybe, outdoorMaxC: maybe, outdoorMinC: maybe }),
    forecast: forecast.nullable(),
    commands: z.array(command),
    wishes: z.array(z.strictObject({ from: instant, to: instant, wish: z.enum(WISHES) })),
    told: z
      .array(
        z.strictObject({ at: instant, what: z.enum(TOLD), point: maybeText, takenBack: instant.nullable() }),
      )
      .optional()
      .describe('what the owner said of the bank; left out when nothing was said'),
    interlocks: z.array(z.strictObject({ what: z.string(), minutes: number, times: number, first: instant })),
    probes: z.array(probe),
    learned: z.array(learned),
    figures: z
      .record(z.enum(FIGURES), maybe)
      .describe('what drift is read from, led back to reference conditions as far as one night allows'),
    figureErrors: z
      .record(z.enum(FIGURES), maybe)
      .describe('standard error of each, where one night tells it'),
    refill: refill.nullable(),
    probeChecks: z.array(probeCheck).describe('readings where nature holds the place, so that they stay'),
    conditions: z
      .strictObject({
        chargeOutdoorC: maybe,
        chargeCoolantC: maybe,
        chargeInventoryPct: maybe,
        dischargeInventoryPct: maybe,
        dischargeLeavingC: maybe,
        dischargeHumidityPct: maybe,
        dischargeCoilDryK: describe(maybe, 'water above the dew point of the room; 0 on a wet coil'),
      })
      .describe('under which the figures were found'),
    trace,
    caution: z.string(),
  })
  .describe('What one night of a stored-ice cooling plant made, used, cost and delivered.');

export type NightSheet = z.output<typeof nightSheetSchema>;
export type TraceColumn = 'price' | 'outdoorC' | 'roomC' | 'limitC' | 'iceKwh' | 'iceLowKwh' | 'iceHighKwh';

/** JSON Schema 2020-12 of the sheet, as published. */
export function nightSheetJsonSchema(): Record<string, unknown> {
  return z.toJSONSchema(nightSheetSchema, { target: 'draft-2020-12' }) as Record<string, unknown>;
}

/**
 * A stored sheet read back; null when it is of another schema or damaged. The store holds only what was written by
 * this program, so the schema's name is checked and not every field: a ledger of years opens a thousand of them.
 */
export function readSheet(body: string): NightSheet | null {
  let value: unknown;
  try {
    value = JSON.parse(body);
  } catch {
    return null;
  }
  return isSheet(value) ? value : null;
}

function isSheet(value: unknown): value is NightSheet {
  return (
    typeof value === 'object' && value !== null && 'schema' in value && value.schema === NIGHT_SHEET_SCHEMA
  );
}
