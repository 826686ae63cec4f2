/**
 * The site file: every key with its type, unit, range, default and one sentence, declared here and nowhere else.
 * Names inside carry their unit; what owners write carries its own.
 */
import type * as z from 'zod';
import { COMMANDS, STRATEGIES } from './commands.ts';
import { isPointId } from './points.ts';
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
  sectionsBy,
  text,
  truth,
  whole,
  zone,
} from './schema.ts';

const anyText = text(/\S/, 'some text');
const slug = text(/^[a-z0-9]([a-z0-9-]*[a-z0-9])?$/, 'lower-case letters, digits and inner hyphens');
const topic = text(/^[^+#\0]+$/u, 'an MQTT topic without + or #');
const topicFilterRoot = text(
  /^[a-z0-9]([a-z0-9-]*[a-z0-9])?$/,
  'one topic level of a-z, 0-9 and inner hyphens',
);
const pointer = text(/^(\/([^~/]|~[01])*)*$/, 'a JSON pointer such as "/temperature"');
const clockTime = text(/^([01]\d|2[0-3]):[0-5]\d$/, 'a local time as HH:MM');
const monthDay = text(/^(0[1-9]|1[0-2])-(0[1-9]|[12]\d|3[01])$/, 'a day of the year as MM-DD');
const date = text(/^\d{4}-\d{2}-\d{2}$/, 'a date as YYYY-MM-DD');
const currency = text(/^[A-Z]{3}$/, 'an ISO 4217 currency code such as EUR');
const weekday = choice(['MO', 'TU', 'WE', 'TH', 'FR', 'SA', 'SU']);
const cronLine = text(/^\S+(\s+\S+){4}$/, 'a cron line of five fields such as "0 3 * * *"');
const environmentName = text(/^[A-Z_][A-Z0-9_]*$/, 'the name of an environment variable');
const port = whole(0, 65535);

const siteSection = section('Where the plant stands and how its figures are shown.', {
  id: requiredKey('id', slug, 'Short name; the Homie device and the store carry it.'),
  name: requiredKey('name', anyText, 'Name for people, on the page and the night sheet.'),
  zone: requiredKey('zone', zone(), 'Local time of the site, its nights and its timetable.'),
  latitudeDeg: requiredKey('latitude', quantity('angle', '-90 deg', '90 deg'), 'Latitude, north positive.'),
  longitudeDeg: requiredKey(
    'longitude',
    quantity('angle', '-180 deg', '180 deg'),
    'Longitude, east positive.',
  ),
  elevationM: key(
    'elevation',
    quantity('length', '-430 m', '5000 m'),
    '0 m',
    'Height above the sea, for air pressure and sun.',
  ),
  currency: key('currency', currency, 'EUR', 'Currency of every amount of money.'),
  units: key('units', choice(['SI', 'IP']), 'SI', 'Units that figures are shown in: SI, or inch-pound.'),
});

const tlsSection = section('Certificates for an mqtts:// or wss:// broker.', {
  caFile: optionalKey(
    'ca-file',
    anyText,
    "File with the broker's certificate authority; the system's own when left out.",
  ),
  certFile: optionalKey('cert-file', anyText, 'File with the client certificate.'),
  keyFile: optionalKey('key-file', anyText, 'File with the key of the client certificate.'),
});

const brokerSection = section('The MQTT broker that carries readings and commands.', {
  embedded: key(
    'embedded',
    truth(),
    false,
    'Start a small broker inside rimehold instead of connecting to one (MQTT 3.1.1, no password).',
  ),
  listenHost: key('listen-host', anyText, '127.0.0.1', 'Address that the embedded broker listens on.'),
  listenPort: key(
    'listen-port',
    port,
    1883,
    'Port that the embedded broker listens on; 0 takes any free one.',
  ),
  url: key(
    'url',
    text(/^(mqtts?|wss?):\/\/\S+$/, 'a broker address such as "mqtt://192.168.1.5:1883"'),
    'mqtt://127.0.0.1:1883',
    'Address of the broker.',
  ),
  protocol: key(
    'protocol',
    choice(['auto', '5', '3.1.1']),
    'auto',
    'MQTT version; auto tries 5 and falls back to 3.1.1.',
  ),
  clientId: optionalKey(
    'client-id',
    anyText,
    'MQTT client identifier; `rimehold-` and the site id when left out.',
  ),
  user: optionalKey('user', anyText, 'User name at the broker.'),
  passwordFile: optionalKey('password-file', anyText, 'File whose first line is the password.'),
  passwordEnv: optionalKey('password-env', environmentName, 'Environment variable that holds the password.'),
  tls: optionalKey('tls', tlsSection, 'Certificates; needed only when the broker asks for its own.'),
});

const pointSection = section('Where a point is heard and how its payload is read.', {
  topic: requiredKey('topic', topic, 'Topic that carries the point.'),
  read: key(
    'read',
    text(
      /^(plain|senml:.+|(\/([^~/]|~[01])*)+)$/,
      'plain, a JSON pointer such as "/temperature", or senml:name',
    ),
    'plain',
    'How to find the value: plain text, a JSON pointer, or a name in a SenML pack.',
  ),
  unit: optionalKey(
    'unit',
    anyText,
    "Unit of the value as it arrives; the point's own when left out. SenML packs name their own.",
  ),
  timePointer: optionalKey(
    'time',
    pointer,
    'JSON pointer to the time of measurement; the arrival time counts when left out.',
  ),
  maxAgeMs: key(
    'max-age',
    duration('PT5S', 'P7D'),
    'PT10M',
    'Age from which the last value is stale and no longer used.',
  ),
  offsetK: key(
    'offset',
    quantity('temperatureDifference', '-5 K', '5 K'),
    '0 K',
    'Known error of a thermometer, added to what it says.',
  ),
  trueText: key('true', anyText, 'true', 'Payload that means true, for true/false points.'),
  falseText: key('false', anyText, 'false', 'Payload that means false, for true/false points.'),
});

const pointId = text(/^[a-z-]+(\/[a-z0-9-]+)?$/, 'a point name').refine(isPointId, 'expected a known point');

export const BANK_FORMS = [
  'ice-on-coil-external',
  'ice-on-coil-internal',
  'sealed-containers',
  'open-tub',
] as const;
export type BankForm = (typeof BANK_FORMS)[number];

const bankSection = section('The ice bank.', {
  form: requiredKey(
    'form',
    choice(BANK_FORMS),
    'How ice is made and melted: external melt (water round the ice), internal melt (brine in the tube), sealed containers, or an open tub.',
  ),
  waterL: requiredKey(
    'water',
    quantity('volume', '20 L', '10000 L'),
    'Water in the bank, that which freezes included.',
  ),
  mostIceKg: requiredKey(
    'most-ice',
    quantity('mass', '5 kg', '9000 kg'),
    'Most ice that the bank may ever hold; charging stops there.',
  ),
  usefulLeavingC: key(
    'useful-leaving',
    quantity('temperature', '1 degC', '20 degC'),
    '10 degC',
    'Warmest leaving water that still cools; ice on hand counts the cold of the water up to it.',
  ),
  heatLeakWPerK: key(
    'heat-leak',
    quantity('conductance', '0.1 W/K', '100 W/K'),
    '2 W/K',
    'Heat that leaks in for each kelvin of difference; learned from there.',
  ),
  surroundC: key(
    'surround',
    quantity('temperature', '-20 degC', '50 degC'),
    '22 degC',
    'Air round the bank where no bank-surround point is heard.',
  ),
  stands: key(
    'stands',
    choice(['indoors', 'cellar', 'outdoors']),
    'indoors',
    'Where the bank stands; without a bank-surround point the surround follows the room, nothing, or the outdoor air.',
  ),
  meltWPerK: key(
    'melt-conductance',
    quantity('conductance', '10 W/K', '50000 W/K'),
    '450 W/K',
    'Conductance from melt water to ice at half inventory under the pump; learned from there.',
  ),
  freezeWPerK: key(
    'freeze-conductance',
    quantity('conductance', '10 W/K', '50000 W/K'),
    '180 W/K',
    'Conductance from bare coil to water at the start of freezing; learned from there.',
  ),
  waterAreaM2: key(
    'water-area',
    quantity('area', '0.02 m2', '20 m2'),
    '0.4 m2',
    'Horizontal section of the bank: level and, for an open tub, evaporation.',
  ),
  electrodeIceKg: optionalKey(
    'electrode-ice',
    quantity('mass', '1 kg', '9000 kg'),
    'Ice in the bank when the thickness electrode reads iced.',
  ),
  fullCoolantC: optionalKey(
    'full-coolant',
    quantity('temperature', '-30 degC', '-1 degC'),
    'Coolant supply temperature at which the bank is full; charging stops there.',
  ),
  fullLevelMm: optionalKey(
    'full-level',
    quantity('level', '1 mm', '3000 mm'),
    'Water level at which the bank is full; charging stops there.',
  ),
  emptyLevelMm: optionalKey(
    'empty-level',
    quantity('level', '1 mm', '3000 mm'),
    'Water level with no ice at all.',
  ),
});

const chillerSection = section('The ice machine.', {
  iceMakingW: requiredKey(
    'ice-making',
    quantity('power', '50 W', '200 kW'),
    'Heat taken from the bank at the rated outdoor temperature, little ice on the coil.',
  ),
  powerW: requiredKey('power', quantity('power', '20 W', '100 kW'), 'Electrical power at the same point.'),
  ratedOutdoorC: key(
    'rated-outdoor',
    quantity('temperature', '10 degC', '45 degC'),
    '25 degC',
    'Outdoor temperature of the rating.',
  ),
  ratedEvaporatingC: key(
    'rated-evaporating',
    quantity('temperature', '-35 degC', '0 degC'),
    '-8 degC',
    'Evaporating temperature of the rating.',
  ),
  rejects: key(
    'rejects-heat',
    choice(['outdoors', 'cooled-room', 'other-room']),
    'outdoors',
    'Where its condenser gives off heat; a machine in the cooled room heats it.',
  ),
  minOnMs: key('minimum-on', duration('PT0S', 'PT4H'), 'PT20M', 'Shortest run of the compressor.'),
  minOffMs: key('minimum-off', duration('PT0S', 'PT4H'), 'PT10M', 'Shortest rest of the compressor.'),
  runningAboveW: key(
    'running-above',
    quantity('power', '1 W', '5 kW'),
    '60 W',
    'Power above which the machine counts as running.',
  ),
  startW: key(
    'start-power',
    quantity('power', '0 W', '200 kW'),
    '0 W',
    'Short power surge at start that an inverter has to carry.',
  ),
  startCost: key(
    'start-cost',
    money('start'),
    '0.02 EUR/start',
    'Wear of one start, so that plans do not chatter.',
  ),
  mostOutdoorC: key(
    'most-outdoor',
    quantity('temperature', '25 degC', '60 degC'),
    '43 degC',
    'Outdoor temperature above which the machine must not run.',
  ),
  directCooling: key(
    'direct-cooling',
    truth(),
    false,
    'Whether the machine can cool the load without making ice.',
  ),
});

const deliverySection = section('Pump, fan coil and the loop between bank and rooms.', {
  flowLPerMin: requiredKey(
    'flow',
    quantity('waterFlow', '0.5 L/min', '200 L/min'),
    'Melt-water flow with the pump on.',
  ),
  pumpW: key('pump-power', quantity('power', '1 W', '2 kW'), '45 W', 'Power of the pump; it warms the loop.'),
  fanW: key('fan-power', quantity('power', '0 W', '2 kW'), '40 W', 'Power of the fans; it warms the room.'),
  coilWPerK: key(
    'coil-conductance',
    quantity('conductance', '10 W/K', '5000 W/K'),
    '180 W/K',
    'Conductance of all fan coils together, dry.',
  ),
  airM3PerH: key(
    'air-flow',
    quantity('airFlow', '20 m3/h', '20000 m3/h'),
    '700 m3/h',
    'Air through all fan coils.',
  ),
  runningAboveW: key(
    'pump-running-above',
    quantity('power', '0.5 W', '500 W'),
    '10 W',
    'Pump power above which water flows.',
  ),
  dryPumpW: optionalKey(
    'dry-pump-power',
    quantity('power', '0.5 W', '500 W'),
    'Pump power below which a running pump has run dry.',
  ),
  coilFreezeC: key(
    'coil-freeze',
    quantity('temperature', '-5 degC', '5 degC'),
    '-1 degC',
    'Leaving water below which no water is sent to the coil.',
  ),
});

const homeSection = section('When somebody is home, in local time.', {
  days: key(
    'days',
    listOf(weekday),
    ['MO', 'TU', 'WE', 'TH', 'FR', 'SA', 'SU'],
    'Days of the week on which it starts.',
  ),
  from: requiredKey('from', clockTime, 'From.'),
  to: requiredKey('to', clockTime, 'Until; at or before `from` it is on the next day.'),
});

const cabinSection = section('The cooled building; a first guess, learned from there.', {
  floorM2: key('floor', quantity('area', '4 m2', '1000 m2'), '50 m2', 'Cooled floor area.'),
  heatLossWPerK: key(
    'heat-loss',
    quantity('conductance', '5 W/K', '5000 W/K'),
    '110 W/K',
    'Fabric and air leakage together.',
  ),
  capacityKwhPerK: key(
    'heat-capacity',
    quantity('heatCapacity', '0.1 kWh/K', '200 kWh/K'),
    '3 kWh/K',
    'Heat that the fabric holds for each kelvin.',
  ),
  apertureM2: key(
    'solar-aperture',
    quantity('area', '0 m2', '200 m2'),
    '3 m2',
    'Window area times its transmission, all sides.',
  ),
  occupants: key('occupants', whole(0, 50), 2, 'People who are home in the home hours.'),
  home: key('home', listOf(homeSection), [{ from: '17:00', to: '09:00' }], 'Hours in which comfort counts.'),
  designDayC: optionalKey(
    'design-day',
    quantity('temperature', '15 degC', '55 degC'),
    "Hottest summer afternoon, until the site's own history is known.",
  ),
  designRangeK: key(
    'design-range',
    quantity('temperatureDifference', '2 K', '30 K'),
    '12 K',
    'Daily range of that day.',
  ),
  dryAir: key(
    'dry-air',
    choice(['none', 'night-air', 'evaporative-pad']),
    'none',
    'Cooling that needs no ice where the air allows it.',
  ),
});

const periodSection = section('A price that holds at certain local hours.', {
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

const demandSection = section('A charge on the highest mean power of a month.', {
  price: requiredKey('price', plainNumber(0, 1000), 'Money per kW and month.'),
  overMs: key('over', duration('PT5M', 'PT1H'), 'PT15M', 'Length over which power is averaged.'),
  from: key('from', clockTime, '00:00', 'Local time from which it is measured.'),
  to: key('to', clockTime, '00:00', 'Local time until which it is measured.'),
});

const tariffSection = section('Prices of grid electricity by local time.', {
  zone: optionalKey('zone', zone(), "Zone of the meter's clock; the site's when left out."),
  default: requiredKey('default', plainNumber(-100, 100), 'Money per kWh where no period holds.'),
  periods: key('periods', listOf(periodSection), [], 'Periods; where two hold, the one written first wins.'),
  holidays: key('holidays', listOf(date), [], 'Dates that the tariff treats as holidays.'),
  feedIn: key('feed-in', plainNumber(-100, 100), 0, 'Money paid per kWh fed into the grid.'),
  demand: optionalKey('demand', demandSection, 'Demand charge, where the contract has one.'),
});

const batterySection = section('The site battery.', {
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
  mostDischargeW: key(
    'most-discharge',
    quantity('power', '10 W', '100 kW'),
    '2 kW',
    'Highest discharging power.',
  ),
});

const generatorSection = section('A generator.', {
  powerW: requiredKey('power', quantity('power', '100 W', '200 kW'), 'Rated power.'),
  price: requiredKey('fuel-price', money('kWh'), 'Fuel for each kWh made.'),
  quietFrom: key('quiet-from', clockTime, '22:00', 'Local time from which it must be silent.'),
  quietTo: key('quiet-to', clockTime, '08:00', 'Local time until which it must be silent.'),
  minRunMs: key('minimum-run', duration('PT0S', 'PT8H'), 'PT30M', 'Shortest run.'),
});

const islandSection = section('A site with no utility grid.', {
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

const powerSection = section('Where electricity comes from and what it costs: give `tariff` or `island`.', {
  tariff: optionalKey('tariff', tariffSection, 'Grid electricity.'),
  island: optionalKey('island', islandSection, 'Panels, battery and generator.'),
});

const comfortSection = section('What counts as comfortable.', {
  limitC: key(
    'limit',
    quantity('temperature', '18 degC', '32 degC'),
    '26 degC',
    'Room temperature above which the hours are warm.',
  ),
  sleepingLimitC: optionalKey(
    'sleeping-limit',
    quantity('temperature', '16 degC', '32 degC'),
    'Limit in the sleeping hours; the same limit when left out.',
  ),
  sleepingFrom: key('sleeping-from', clockTime, '23:00', 'Local time at which sleeping hours begin.'),
  sleepingTo: key('sleeping-to', clockTime, '07:00', 'Local time at which sleeping hours end.'),
  warmHourPrice: key(
    'warm-hour',
    money('(K h)'),
    '0.50 EUR/(K h)',
    'What one degree-hour above the limit is worth avoiding.',
  ),
});

const timetableSection = section('A line of the timetable.', {
  at: requiredKey('at', cronLine, 'Cron line in local time.'),
  command: requiredKey('command', choice(COMMANDS), 'Command that holds from then on.'),
});

const planningSection = section('How the plan is made.', {
  strategy: key(
    'strategy',
    choice(STRATEGIES),
    'planned',
    'Who decides: the plan, or one of the simple strategies.',
  ),
  horizonMs: key('horizon', duration('PT12H', 'PT72H'), 'PT36H', 'How far the plan looks.'),
  slotMs: key('slot', duration('PT5M', 'PT1H'), 'PT15M', 'Length of one step of the plan.'),
  replanMs: key('replan-every', duration('PT1M', 'PT1H'), 'PT15M', 'Time between plans.'),
  cycleMs: key(
    'cycle',
    duration('PT5S', 'PT1M'),
    'PT30S',
    'Time between two looks at the plant; each yields a command and a record.',
  ),
  scenarios: key('scenarios', whole(3, 100), 20, 'Weather scenarios that a plan is made against.'),
  reserveKwh: key(
    'reserve',
    quantity('energy', '0 kWh', '500 kWh'),
    '0.5 kWh',
    'Ice on hand kept back against a warmer evening than forecast.',
  ),
  timetable: key(
    'timetable',
    listOf(timetableSection),
    [
      { at: '0 0 * * *', command: 'charge-now' },
      { at: '0 8 * * *', command: 'hold' },
      { at: '0 17 * * *', command: 'discharge' },
      { at: '0 23 * * *', command: 'hold' },
    ],
    "The owner's own cron lines, for the strategy `timetable` and to compare with.",
  ),
});

const readbackSection = section('What an actuator says of itself.', {
  topic: requiredKey('topic', topic, 'Topic of its state.'),
  read: key(
    'read',
    text(/^(plain|(\/([^~/]|~[01])*)+)$/, 'plain or a JSON pointer'),
    'plain',
    'How to find the state.',
  ),
  on: optionalKey('on', anyText, "Text that means on; the actuator's own `on`, or true, when left out."),
});

const actuatorSection = section('How one machine is switched.', {
  topic: requiredKey('topic', topic, 'Topic that switches it.'),
  on: key('on', anyText, 'ON', 'Payload that switches it on.'),
  off: key('off', anyText, 'OFF', 'Payload that switches it off.'),
  readback: optionalKey('readback', readbackSection, 'Where it tells its state.'),
  confirmBy: optionalKey('confirm-by', pointId, 'Power point that shows whether it really runs.'),
  confirmWithinMs: key(
    'confirm-within',
    duration('PT5S', 'PT15M'),
    'PT2M',
    'Time after which a switch that shows no effect is reported.',
  ),
});

const actuatorsSection = section(
  'The machines that rimehold switches; leave one out and only the command is published.',
  {
    chiller: optionalKey('chiller', actuatorSection, 'The ice machine.'),
    pump: optionalKey('pump', actuatorSection, 'The melt-water pump.'),
    fan: optionalKey('fan', actuatorSection, 'The fan coil.'),
  },
);

const templateSection = section("An announcement in the owner's own words.", {
  topic: requiredKey('topic', anyText, 'Topic, with {{placeholders}}.'),
  payload: requiredKey('payload', anyText, 'Payload, with {{placeholders}}.'),
});

const announceSection = section('How rimehold describes itself on the broker.', {
  domain: key('domain', topicFilterRoot, 'homie', 'First topic level of the Homie device.'),
  logLevel: key(
    'log-level',
    choice(['none', 'error', 'warn', 'info']),
    'warn',
    'Least level of messages published as $log.',
  ),
  templates: key(
    'templates',
    listOf(templateSection),
    [],
    'One retained message for each property, for hubs with a discovery form of their own.',
  ),
});

const webSection = section('The page and its programming interface.', {
  enabled: key('enabled', truth(), true, 'Serve the page.'),
  host: key('host', anyText, '127.0.0.1', 'Address to listen on.'),
  port: key('port', port, 8377, 'Port to listen on; 0 takes any free one.'),
  passphraseFile: optionalKey(
    'passphrase-file',
    anyText,
    'File whose first line is the passphrase for changes; without one the page only shows.',
  ),
  passphraseEnv: optionalKey(
    'passphrase-env',
    environmentName,
    'Environment variable that holds the passphrase.',
  ),
});

const storeSection = section('The database file.', {
  file: key('file', anyText, 'rimehold.db', 'SQLite file, relative to the working directory.'),
  keepRawMs: key(
    'keep-readings',
    duration('P1D', 'P4000D'),
    'P14D',
    'How long readings are kept as they came; older ones are thinned to minutes, then to quarter hours.',
  ),
  flushMs: key(
    'flush',
    duration('PT1S', 'PT5M'),
    'PT30S',
    'How long readings are gathered before one write, to spare flash.',
  ),
});

const nightsSection = section('The night sheet.', {
  print: key('print', truth(), true, 'Print each sheet on standard output when its night is closed.'),
});

const logSection = section('The log on standard error.', {
  level: key('level', choice(['error', 'warn', 'info', 'debug']), 'info', 'Least level that is written.'),
  form: key('form', choice(['people', 'json']), 'people', 'Lines for people, or JSON.'),
});

export const siteSchema = section('A rimehold site file.', {
  site: requiredKey('site', siteSection, 'Where the plant stands.'),
  broker: key('broker', brokerSection, {}, 'The MQTT broker.'),
  points: requiredKey(
    'points',
    sectionsBy(pointSection, pointId, 'Points that the plant offers.'),
    'Points that the plant offers, by name.',
  ),
  bank: requiredKey('bank', bankSection, 'The ice bank.'),
  chiller: requiredKey('chiller', chillerSection, 'The ice machine.'),
  delivery: requiredKey('delivery', deliverySection, 'Pump and fan coil.'),
  cabin: key('cabin', cabinSection, {}, 'The cooled building.'),
  power: requiredKey('power', powerSection, 'Tariff or island.'),
  comfort: key('comfort', comfortSection, {}, 'What counts as comfortable.'),
  planning: key('planning', planningSection, {}, 'How the plan is made.'),
  actuators: key('actuators', actuatorsSection, {}, 'The machines that rimehold switches.'),
  nights: key('nights', nightsSection, {}, 'The night sheet.'),
  announce: key('announce', announceSection, {}, 'Self-description on the broker.'),
  web: key('web', webSection, {}, 'The page.'),
  store: key('store', storeSection, {}, 'The database.'),
  log: key('log', logSection, {}, 'The log.'),
});

export type SiteConfig = z.output<typeof siteSchema>;
export type PointConfig = z.output<typeof pointSection>;
export type BankConfig = SiteConfig['bank'];
export type ChillerConfig = SiteConfig['chiller'];
export type DeliveryConfig = SiteConfig['delivery'];
export type CabinConfig = SiteConfig['cabin'];
export type PowerConfig = SiteConfig['power'];
export type TariffConfig = NonNullable<PowerConfig['tariff']>;
export type IslandConfig = NonNullable<PowerConfig['island']>;
export type ComfortConfig = SiteConfig['comfort'];
export type PlanningConfig = SiteConfig['planning'];
export type ActuatorConfig = NonNullable<SiteConfig['actuators']['chiller']>;
