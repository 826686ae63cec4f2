/** Sections of the site file about the plant: points, bank, ice machine, delivery, cabin, comfort. */
import {
  choice,
  duration,
  key,
  listOf,
  money,
  optionalKey,
  quantity,
  requiredKey,
  section,
  text,
  truth,
  whole,
} from './schema.ts';
import { anyText, topic, pointer, clockTime, weekday } from './site-words.ts';

export const pointSection = section('Where a point is heard and how its payload is read.', {
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
    'Age from which the last value is stale and no longer used; days for a contact that speaks only when it changes.',
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

export const BANK_FORMS = [
  'ice-on-coil-external',
  'ice-on-coil-internal',
  'sealed-containers',
  'open-tub',
] as const;

export const bankSection = section('The ice bank.', {
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

export const chillerSection = section('The ice machine.', {
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

export const deliverySection = section('Pump, fan coil and the loop between bank and rooms.', {
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

export const homeSection = section('When somebody is home, in local time.', {
  days: key(
    'days',
    listOf(weekday),
    ['MO', 'TU', 'WE', 'TH', 'FR', 'SA', 'SU'],
    'Days of the week on which it starts.',
  ),
  from: requiredKey('from', clockTime, 'From.'),
  to: requiredKey('to', clockTime, 'Until; at or before `from` it is on the next day.'),
});

export const cabinSection = section('The cooled building; a first guess, learned from there.', {
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

export const comfortSection = section('What counts as comfortable.', {
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

export type BankForm = (typeof BANK_FORMS)[number];
