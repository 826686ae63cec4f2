/** Small things that several sections of the site file are made of. */
import { isPointId } from './points.ts';
import { choice, text, whole } from './schema.ts';

export const anyText = text(/\S/, 'some text');

export const slug = text(/^[a-z0-9]([a-z0-9-]*[a-z0-9])?$/, 'lower-case letters, digits and inner hyphens');

export const topic = text(/^[^+#\0]+$/u, 'an MQTT topic without + or #');

export const topicFilterRoot = text(
  /^[a-z0-9]([a-z0-9-]*[a-z0-9])?$/,
  'one topic level of a-z, 0-9 and inner hyphens',
);

export const pointer = text(/^(\/([^~/]|~[01])*)*$/, 'a JSON pointer such as "/temperature"');

export const clockTime = text(/^([01]\d|2[0-3]):[0-5]\d$/, 'a local time as HH:MM');

export const monthDay = text(/^(0[1-9]|1[0-2])-(0[1-9]|[12]\d|3[01])$/, 'a day of the year as MM-DD');

export const date = text(/^\d{4}-\d{2}-\d{2}$/, 'a date as YYYY-MM-DD');

export const currency = text(/^[A-Z]{3}$/, 'an ISO 4217 currency code such as EUR');

export const weekday = choice(['MO', 'TU', 'WE', 'TH', 'FR', 'SA', 'SU']);

export const cronLine = text(/^\S+(\s+\S+){4}$/, 'a cron line of five fields such as "0 3 * * *"');

export const environmentName = text(/^[A-Z_][A-Z0-9_]*$/, 'the name of an environment variable');

export const port = whole(0, 65535);

export const pointId = text(/^[a-z-]+(\/[a-z0-9-]+)?$/, 'a point name').refine(
  isPointId,
  'expected a known point',
);
