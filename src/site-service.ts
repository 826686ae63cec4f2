/** Sections of the site file about the service itself: broker, planning, actuators, page, store, log. */
import { COMMANDS, STRATEGIES } from './commands.ts';
import {
  choice,
  duration,
  key,
  listOf,
  optionalKey,
  quantity,
  requiredKey,
  section,
  text,
  truth,
  whole,
} from './schema.ts';
import { anyText, topic, topicFilterRoot, cronLine, environmentName, port, pointId } from './site-words.ts';

export const tlsSection = section('Certificates for an mqtts:// or wss:// broker.', {
  caFile: optionalKey(
    'ca-file',
    anyText,
    "File with the broker's certificate authority; the system's own when left out.",
  ),
  certFile: optionalKey('cert-file', anyText, 'File with the client certificate.'),
  keyFile: optionalKey('key-file', anyText, 'File with the key of the client certificate.'),
});

export const brokerSection = section('The MQTT broker that carries readings and commands.', {
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

export const timetableSection = section('A line of the timetable.', {
  at: requiredKey('at', cronLine, 'Cron line in local time.'),
  command: requiredKey('command', choice(COMMANDS), 'Command that holds from then on.'),
});

export const planningSection = section('How the plan is made.', {
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

export const readbackSection = section('What an actuator says of itself.', {
  topic: requiredKey('topic', topic, 'Topic of its state.'),
  read: key(
    'read',
    text(/^(plain|(\/([^~/]|~[01])*)+)$/, 'plain or a JSON pointer'),
    'plain',
    'How to find the state.',
  ),
  on: optionalKey('on', anyText, "Text that means on; the actuator's own `on`, or true, when left out."),
});

export const actuatorSection = section('How one machine is switched.', {
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

export const actuatorsSection = section(
  'The machines that rimehold switches; leave one out and only the command is published.',
  {
    chiller: optionalKey('chiller', actuatorSection, 'The ice machine.'),
    pump: optionalKey('pump', actuatorSection, 'The melt-water pump.'),
    fan: optionalKey('fan', actuatorSection, 'The fan coil.'),
  },
);

export const templateSection = section("An announcement in the owner's own words.", {
  topic: requiredKey('topic', anyText, 'Topic, with {{placeholders}}.'),
  payload: requiredKey('payload', anyText, 'Payload, with {{placeholders}}.'),
});

export const announceSection = section('How rimehold describes itself on the broker.', {
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

export const webSection = section('The page and its programming interface.', {
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

export const storeSection = section('The database file.', {
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

export const nightsSection = section('The night sheet.', {
  print: key('print', truth(), true, 'Print each sheet on standard output when its night is closed.'),
});

export const logSection = section('The log on standard error.', {
  level: key('level', choice(['error', 'warn', 'info', 'debug']), 'info', 'Least level that is written.'),
  form: key('form', choice(['people', 'json']), 'people', 'Lines for people, or JSON.'),
});
