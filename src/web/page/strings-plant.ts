/** The English words of the commissioning sheet. */
import type { Strategy } from '../../commands.ts';

const STRATEGY_WORDS: Readonly<Record<Strategy, string>> = {
  planned: 'planned: least cost',
  'storage-priority': 'storage priority: ice first',
  'chiller-priority': 'chiller priority: ice last',
  timetable: 'timetable: your cron lines',
};

/** What the learned figures mean. Those in % are shares, or changes of a share. */
const LEARNED_WORDS: Readonly<
  Record<string, { readonly what: string; readonly as?: '%' | '% for 10 degrees' }>
> = {
  'heat-leak': { what: 'Heat leak of the bank' },
  'charging-factor': { what: 'Ice making, of what the site file says', as: '%' },
  'charging-by-outdoor': { what: 'Its change for each 10 degrees outdoors', as: '% for 10 degrees' },
  'charging-by-inventory': { what: 'Its change from empty to full', as: '%' },
  'machine-power-factor': { what: 'Power of the ice machine, of what the site file says', as: '%' },
  'melt-conductance': { what: 'Conductance of melting, half full' },
  'melt-exponent': { what: 'How it falls as ice is spent, exponent' },
  'freeze-conductance': { what: 'Conductance of freezing' },
  'pump-flow': { what: 'Flow of the pump' },
  'coil-conductance': { what: 'Conductance of the fan coil' },
  'useful-capacity': { what: 'Ice of a full bank' },
};

export const plantWords = {
  heading: 'Commissioning sheet',
  points: 'Points',
  places: {
    bank: 'Bank',
    loop: 'Melt-water loop',
    machine: 'Ice machine',
    rooms: 'Rooms',
    outdoors: 'Outdoors',
    power: 'Power',
    other: 'Other',
  },
  columns: {
    point: 'Point',
    last: 'Last value',
    age: 'Age',
    heard: 'Heard',
    error: 'Error at the ice point',
    remark: 'Remark',
    plausible: 'Plausible',
  },
  fresh: 'yes',
  stale: 'stale',
  never: 'never',
  required: 'needed',
  range: (low: string, high: string) => `${low} … ${high}`,
  error: (error: string, sd: string | null, date: string) => `${error}${sd ? ` ± ${sd}` : ''}, ${date}`,
  setAside: (why: string) => `Set aside: ${why}`,
  learned: 'Learned of this plant',
  learnedEmpty: 'Nothing is learned yet; the figures of the site file hold.',
  figure: 'Figure',
  value: 'Value',
  sd: '±',
  sdMeans: '± is one standard deviation, in the same unit.',
  learnedNames: LEARNED_WORDS,
  interlocks: 'Interlocks',
  state: 'State',
  says: 'What it says',
  speaks: 'Holds back',
  noneSpeaks: 'None holds anything back.',
  quiet: (names: string) => `Quiet: ${names}.`,
  settings: 'Settings',
  strategy: 'Who decides',
  strategies: STRATEGY_WORDS,
  limit: (unit: string) => `Comfort limit, ${unit}`,
  apply: 'Apply',
  applied: 'Applied.',
  parts: 'Parts',
  part: 'Part',
  broker: 'Broker',
  clock: 'Clock',
  store: 'Database',
  words: {
    connected: 'connected',
    away: 'away',
    set: 'set',
    doubtful: 'doubtful',
    ok: 'in order',
    full: 'disk full',
    broken: 'not usable',
  },
} as const;
