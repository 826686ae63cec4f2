/** Every English word of the page, those of *Plant* beside it. Sentences are short, plain, and say what to do. */
import type { Mode, Told, WishName } from '../../commands.ts';
import { plantWords } from './strings-plant.ts';

const plural = (count: number, one: string): string => `${count} ${one}${count === 1 ? '' : 's'}`;

const MODE_WORDS: Readonly<Record<Mode, string>> = {
  idle: 'at rest',
  charging: 'making ice',
  discharging: 'cooling from ice',
  'charging-while-discharging': 'making ice and cooling',
  'direct-cooling': 'cooling directly',
};

const WISH_WORDS: Readonly<Record<WishName, string>> = {
  none: 'No wish',
  'cool-now': 'Cool now',
  'save-ice': 'Save ice',
  'make-ice': 'Make ice',
  'stand-down': 'Stand down',
};

const WISH_MEANING: Readonly<Record<WishName, string>> = {
  none: '',
  'cool-now': 'melts ice for the rooms now, whatever the plan says',
  'save-ice': 'keeps the ice for later; the rooms may get warm',
  'make-ice': 'runs the ice machine now, whatever power costs',
  'stand-down': 'leaves all machines off',
};

const TOLD_WORDS: Readonly<Record<Told, string>> = {
  empty: 'The bank is empty',
  full: 'The bank is full',
  'tank-refilled': 'The tank was refilled',
  'probe-moved': 'A probe was moved',
};

export const strings = {
  unknown: 'not known',
  none: '–',
  weekdays: ['Sun', 'Mon', 'Tue', 'Wed', 'Thu', 'Fri', 'Sat'],
  months: 'January February March April May June July August September October November December'.split(' '),
  day: (weekday: string, day: number, month: string) => `${weekday} ${day} ${month}`,
  minutes: (count: number) => plural(count, 'minute'),
  days: (count: number) => plural(count, 'day'),
  hoursMinutes: (hours: number, minutes: number) =>
    minutes === 0 ? `${hours} h` : `${hours} h ${minutes} min`,
  secondsShort: (count: number) => `${count} s`,
  minutesShort: (count: number) => `${count} min`,
  hoursShort: (count: number) => `${count} h`,
  truth: (value: boolean) => (value ? 'yes' : 'no'),

  product: 'rimehold',
  skip: 'Skip to the sheet',
  views: { tonight: 'Tonight', nights: 'Nights', rehearsal: 'Rehearsal', plant: 'Plant' },
  viewsLabel: 'Sheets',
  title: (view: string, site: string) => `${view} · ${site}`,
  block: {
    site: 'Site',
    night: 'Night',
    sheet: 'Sheet',
    issued: 'Issued',
    clock: 'Clock',
    revision: 'Revision',
    clockSet: 'set',
    clockDoubtful: 'doubtful',
    notYet: 'not yet',
  },
  hold: 'Hold the page still',
  heldAt: (clock: string) => `Held still at ${clock}; the plant goes on.`,
  units: 'Units',
  unitsSite: (units: string) => `as the site (${units})`,
  unitsSI: 'SI (°C, kWh)',
  unitsIP: 'inch-pound (°F, kBTU)',
  opening: 'Opening the sheet …',
  failed: (sentence: string) => `This could not be read: ${sentence}`,

  answer: {
    nothing: 'Nothing is measured yet.',
    noIce: 'No ice on hand.',
    hardlyAny: (most: string) => `Hardly any ice: ${most} at most.`,
    perhapsNone: (most: string) => `Not sure of any ice: from none to ${most} may be in the bank.`,
    perhapsOnly: (until: string | null, least: string) =>
      `Ice ${until ? `until ${until}` : 'for the whole night'}, perhaps only until ${least}.`,
    spare: (until: string, spare: string) => `Ice until ${until}, ${spare} to spare.`,
    short: (until: string, short: string) => `Ice until ${until}, ${short} short.`,
    unneeded: (until: string) => `Ice until ${until}; the plan asks for none before noon.`,
    whole: 'Ice for the whole night.',
    since: (doing: string, since: string | null) =>
      `${doing.charAt(0).toUpperCase()}${doing.slice(1)}${since ? ` since ${since}` : ''}.`,
    giveOrTake: (energy: string) => `Give or take ${energy}`,
    helps: (point: string) => `one more point, ${point}, would narrow that most`,
    evening: (load: string, high: string) => `The evening may need ${load}, ${high} if it turns out warm.`,
  },
  doing: (mode: Mode) => MODE_WORDS[mode],
  figures: {
    label: 'Figures now',
    ice: 'Ice on hand',
    inventory: 'Inventory',
    leaving: 'Leaving water',
    room: 'Room (limit)',
    outdoor: 'Outdoor',
    price: 'Price',
    worth: 'Worth of ice',
    inventoryText: (pct: string, mass: string) => `${pct} %, ${mass}`,
    roomText: (room: string, limit: string) => `${room} (${limit})`,
    range: (value: string, low: string, high: string) => `${value} (${low}\u2060–\u2060${high})`,
  },

  strip: {
    heading: (day: string) => `The night of ${day}`,
    before: 'Night before',
    after: 'Night after',
    tonight: 'Tonight',
    asTable: 'As a table',
    thought: 'Lay over what it thought at noon',
    noThought: 'No plan was made near that noon.',
    label: 'Strip of the night: price, temperatures, ice on hand and what runs, noon to noon',
    help: 'Arrow keys move the reading line by a quarter of an hour, with Shift by an hour; N goes to now, T turns the strip into a table.',
    lanes: {
      price: (currency: string) => `price, ${currency}/kWh`,
      temperatures: (unit: string) => `outdoor, room, ${unit}`,
      ice: (unit: string) => `ice on hand, ${unit}`,
      runs: 'what runs',
    },
    now: 'now',
    outdoor: 'outdoor',
    room: 'room',
    limit: 'limit',
    ice: 'ice',
    forecast: 'forecast',
    planned: 'planned',
    thoughtAt: (clock: string) => `thought at ${clock}`,
    gap: 'no data',
    empty: 'Nothing is recorded for this night.',
    band: {
      charging: 'ice',
      discharging: 'cool',
      'charging-while-discharging': 'both',
      'direct-cooling': 'direct',
      idle: '',
    },
    read: {
      time: 'Time',
      price: 'Price',
      outdoor: 'Outdoor',
      room: 'Room (limit)',
      ice: 'Ice on hand',
      runs: 'Runs',
      thought: 'Ice, thought at noon',
      planned: (text: string) => `${text}, planned`,
      forecast: (text: string) => `${text}, forecast`,
    },
    tableCaption: (day: string) => `The night of ${day}, a row for each quarter of an hour`,
  },

  wish: {
    heading: 'Wishes',
    intro: 'Each gives itself back to the plan after its time.',
    words: WISH_WORDS,
    meaning: WISH_MEANING,
    ask: (name: string) => `${name}: for how long?`,
    durations: { PT30M: '30 minutes', PT1H: '1 hour', PT2H: '2 hours', PT4H: '4 hours', PT8H: '8 hours' },
    duration: 'For',
    costing: 'Working out what it costs …',
    cost: (money: string) => `It costs about ${money} more.`,
    saves: (money: string) => `It saves about ${money}.`,
    savesWarm: (money: string) => `In power and ice alone it spares about ${money}; the rooms pay for it.`,
    free: 'It costs about nothing more.',
    freeWarm: 'In power and ice it costs about nothing more.',
    passphrase: 'Passphrase',
    confirm: (name: string) => `Confirm: ${name.toLowerCase()}`,
    cancel: 'Leave it',
    active: (name: string) => `${name} for another`,
    after: 'then the plan takes over again.',
    giveBack: 'Give back now',
    taken: (name: string, until: string) => `${name} until ${until}.`,
    given: 'Given back; the plan decides again.',
    readOnly:
      'This page only shows. To allow wishes, set web.passphrase-file in the site file and start rimehold again.',
    signOut: 'Sign out',
    signedOut: 'Signed out.',
    refused: (sentence: string) => `Not done: ${sentence}`,
  },

  told: {
    heading: 'What you saw',
    intro: 'What you see at the bank counts more than any probe. It can be taken back for an hour.',
    names: TOLD_WORDS,
    when: {
      empty: 'you looked, and there is no ice left',
      full: 'you looked, and it holds all the ice it may',
      'tank-refilled': 'fresh water stands in it, without ice',
      'probe-moved': 'it stands elsewhere, or was changed for another',
    },
    effect: {
      empty: 'The estimate goes to no ice at once, with a narrow interval, and the plan is made anew.',
      full: 'The estimate goes to a full bank at once, with a narrow interval, and the plan is made anew.',
      'tank-refilled':
        'The estimate starts again with water of unknown warmth and no ice, and the level at rest is found anew.',
      'probe-moved': 'What was learned of the errors of this probe is forgotten and learned anew.',
    },
    probe: 'Probe',
    anyProbe: 'any of them',
    moved: (point: string) => `${point} was moved`,
    confirm: 'Confirm',
    change: (before: string, after: string) =>
      before === after ? '' : ` Ice on hand went from ${before} to ${after}.`,
    was: (at: string, what: string, change: string, until: string) =>
      `Told at ${at}: ${what}.${change} Until ${until} it can be taken back; the estimate is then worked out again as if it had never been told.`,
    takeBack: 'Take back',
    takenBack: 'Taken back; the estimate is as if it had never been told.',
  },

  notices: {
    label: 'What needs attention',
    lost: (since: string) => [
      `This page lost rimehold at ${since}.`,
      'It shows what it last knew and keeps trying. See that the machine is on and that this device is on the house network.',
    ],
    standstill: (since: string) => [
      `No record since ${since}.`,
      'The figures are of that time. Look into the log of rimehold, and start it again if it stands still.',
    ],
    broker: (since: string | null) => [
      since ? `The broker is away since ${since}.` : 'The broker is not reached.',
      'Nothing is heard and no command arrives; machines go off when their last command runs out. Start the broker, or correct broker.url.',
    ],
    clock: [
      'The clock is doubtful.',
      'Prices and times may not fit. Let the machine reach a time server, or set its clock by hand.',
    ],
    storeFull: [
      'The disk is full.',
      'Commands go on, but this night is not being recorded. Free some space where the database lies.',
    ],
    storeBroken: [
      'The database cannot be used.',
      'Commands go on, but nothing is recorded. Look into the log, and put back the last backup.',
    ],
    noSensor: [
      'No point has been heard yet.',
      'Let the sensors publish to the topics of the site file; "rimehold check" shows what arrives.',
    ],
    firstDay: [
      'First day.',
      'The plan knows this plant from its site file only and learns from now on. The first night sheet comes at the first noon.',
    ],
    pointSilent: (point: string) => [
      `${point} has not been heard.`,
      'Check its topic in the site file and the power of the sensor.',
    ],
    pointStale: (point: string, ago: string) => [
      `${point} was last heard ${ago} ago.`,
      'Its value is not used. Check its battery and its radio; the estimate goes on without it, less sure.',
    ],
    manyStale: (count: number, names: string, ago: string) => [
      `${count} points have fallen silent, the first ${ago} ago: ${names}.`,
      'Their values are not used. Look at what they share: a radio, a plug, a gateway.',
    ],
    held: (names: readonly string[]) => [`Held back by ${names.join(' and by ')}.`],
  },

  nights: {
    heading: 'Ledger',
    range: 'Show',
    ranges: { '31': 'the last month', '92': 'the last three months', '400': 'the last year' },
    csv: 'CSV',
    empty: 'No night is closed yet. The first sheet is written at noon, after the first evening.',
    emptyRange: 'No night in this range.',
    drifts: 'What drifts',
    since: (day: string) => `since ${day}`,
    caption: (energy: string, degreeHours: string, currency: string) =>
      `Heat in ${energy}, electricity in kWh, warm hours in ${degreeHours}, money in ${currency}; one row a night, noon to noon`,
    columns: {
      night: 'Night',
      start: 'Ice at start',
      end: 'Ice at end',
      made: 'Made',
      melted: 'Melted',
      leaked: 'Leaked',
      electricity: 'Electricity',
      cop: 'COP',
      cost: 'Cost',
      saved: 'Saved',
      warm: 'Warm hours',
      residual: 'Residual, %',
      note: 'Notes',
    },
    partial: 'partial',
    revised: (revision: number) => `revision ${revision}`,
    total: (month: string, nights: number) => `${month}, ${plural(nights, 'night')}`,
    back: 'Back to the ledger',
    title: 'Night sheet',
    sheet: (day: string) => `Night sheet of ${day}`,
    print: 'Sheet for printing',
    json: 'JSON',
    missing: (day: string) => `There is no sheet for ${day}. A sheet is written at the noon after.`,
  },

  rehearsal: {
    heading: 'Rehearsal',
    intro: 'Recorded nights, run again with one thing changed, beside what happened.',
    run: 'As run',
    tried: 'As tried',
    difference: 'Difference',
    row: 'Figure',
    rows: ['Electricity', 'Cost', 'Warm hours', 'Starts of the machine'],
    notYet: 'Nothing can be tried from this page yet.',
    needs: (recorded: number) =>
      recorded === 0
        ? 'A rehearsal needs nights to replay: none is recorded yet. Let the plant run; each noon adds one.'
        : `A rehearsal needs nights to replay: ${plural(recorded, 'night')} ${recorded === 1 ? 'is' : 'are'} recorded, and each noon adds one.`,
    caption: 'The columns that a rehearsal will fill',
  },

  plant: plantWords,
} as const;
