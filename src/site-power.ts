/** Sections of the site file about electricity: tariff or island. */
import {
  choice,
  duration,
  key,
  listOf,
  money,
  optionalKey,
  plainNumber,
  quantity,
  requiredKey,
  section,
  zone,
} from './schema.ts';
import { anyText, clockTime, monthDay, date, weekday } from './site-words.ts';

export const periodSection = section('A price that holds at certain local hours.', {
  name: requiredKey('name', anyText, 'Name of the period, as the bill has it.'),
  price: requiredKey('price', plainNumber(-100, 100), 'Money per kWh.'),
  from: key('from', clockTime, '00:00', 'Local time at which it begins.'),
  to: key(
    'to',
    clockTime,
    '00:00',
    'Local time at which it ends; at or before `from` it is on the next day.',
  ),
  days: optionalKey('days', listOf(weekday), 'Days on which it begins; every day when left out.'),
  season: optionalKey(
    'season',
    listOf(monthDay),
    'First and last day of its season; all year when left out.',
  ),
  onHolidays: key(
    'on-holidays',
    choice(['as-weekday', 'never', 'only']),
    'as-weekday',
    'Whether it holds when its start day is a holiday.',
  ),
});

export const demandSection = section('A charge on the highest mean power of a month.', {
  price: requiredKey('price', plainNumber(0, 1000), 'Money per kW and month.'),
  overMs: key('over', duration('PT5M', 'PT1H'), 'PT15M', 'Length over which power is averaged.'),
  from: key('from', clockTime, '00:00', 'Local time from which it is measured.'),
  to: key('to', clockTime, '00:00', 'Local time until which it is measured.'),
});

export const blockSection = section("An addition to every price for the month's energy above a threshold.", {
  aboveKwh: requiredKey(
    'above',
    quantity('energy', '0 kWh', '1000000 kWh'),
    "Energy of the month, on the meter's clock, from which it is added.",
  ),
  adds: requiredKey('adds', plainNumber(-100, 100), 'Money per kWh that it adds.'),
});

export const tariffSection = section('Prices of grid electricity by local time.', {
  zone: optionalKey('zone', zone(), "Zone of the meter's clock; the site's when left out."),
  default: requiredKey('default', plainNumber(-100, 100), 'Money per kWh where no period holds.'),
  periods: key('periods', listOf(periodSection), [], 'Periods; where two hold, the one written first wins.'),
  holidays: key('holidays', listOf(date), [], 'Dates that the tariff treats as holidays.'),
  feedIn: key('feed-in', plainNumber(-100, 100), 0, 'Money paid per kWh fed into the grid.'),
  demand: optionalKey('demand', demandSection, 'Demand charge, where the contract has one.'),
  blocks: key('blocks', listOf(blockSection), [], "Additions by the month's energy, where there are any."),
  fixedPerMonth: key('fixed-per-month', plainNumber(0, 10_000), 0, 'Money of the bill for each month.'),
  fixedPerDay: key('fixed-per-day', plainNumber(0, 1000), 0, 'Money of the bill for each day.'),
});

export const batterySection = section('The site battery.', {
  capacityKwh: requiredKey(
    'capacity',
    quantity('energy', '0.1 kWh', '500 kWh'),
    'Energy between empty and full.',
  ),
  floorPct: key(
    'floor',
    quantity('fraction', '0 %', '95 %'),
    '30 %',
    'Charge that ice never takes it below.',
  ),
  wear: key('wear', money('kWh'), '0.06 EUR/kWh', 'Cost of wear for each kWh taken out.'),
  mostChargeW: key('most-charge', quantity('power', '10 W', '100 kW'), '2 kW', 'Highest charging power.'),
  roundTripPct: key(
    'round-trip',
    quantity('fraction', '50 %', '100 %'),
    '90 %',
    'What comes out of it of what went in, charger and inverter counted.',
  ),
  mostDischargeW: key(
    'most-discharge',
    quantity('power', '10 W', '100 kW'),
    '2 kW',
    'Highest discharging power.',
  ),
});

export const generatorSection = section('A generator.', {
  powerW: requiredKey('power', quantity('power', '100 W', '200 kW'), 'Rated power.'),
  price: requiredKey('fuel-price', money('kWh'), 'Fuel for each kWh made.'),
  quietFrom: key('quiet-from', clockTime, '22:00', 'Local time from which it must be silent.'),
  quietTo: key('quiet-to', clockTime, '08:00', 'Local time until which it must be silent.'),
  minRunMs: key('minimum-run', duration('PT0S', 'PT8H'), 'PT30M', 'Shortest run.'),
  startMoney: key('start-cost', plainNumber(0, 100), 0, 'Money that a start costs in wear and fuel.'),
  startsBelowPct: key(
    'starts-below',
    quantity('fraction', '0 %', '95 %'),
    '20 %',
    'Charge of the battery below which it is started.',
  ),
  stopsAtPct: key(
    'stops-at',
    quantity('fraction', '5 %', '100 %'),
    '70 %',
    'Charge of the battery at which it is stopped again.',
  ),
});

export const islandSection = section('A site with no utility grid.', {
  panelsW: requiredKey('panels', quantity('power', '0 W', '200 kW'), 'Peak power of the solar panels.'),
  panelTiltDeg: key(
    'panel-tilt',
    quantity('angle', '0 deg', '90 deg'),
    '30 deg',
    'Slope of the panels from level.',
  ),
  panelAzimuthDeg: key(
    'panel-azimuth',
    quantity('angle', '0 deg', '360 deg'),
    '180 deg',
    'Direction the panels face, clockwise from north.',
  ),
  battery: optionalKey('battery', batterySection, 'Battery, where there is one.'),
  generator: optionalKey('generator', generatorSection, 'Generator, where there is one.'),
  inverterW: key(
    'inverter',
    quantity('power', '100 W', '200 kW'),
    '3 kW',
    'Most power that the inverter carries, starts included.',
  ),
  houseW: key(
    'house-load',
    quantity('power', '0 W', '50 kW'),
    '150 W',
    'Mean load of the house, the cooling plant left out, until it is learned.',
  ),
});

export const powerSection = section(
  'Where electricity comes from and what it costs: give `tariff` or `island`.',
  {
    tariff: optionalKey('tariff', tariffSection, 'Grid electricity.'),
    island: optionalKey('island', islandSection, 'Panels, battery and generator.'),
  },
);
