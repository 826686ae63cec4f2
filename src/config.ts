/**
 * The site file: every key with its type, unit, range, default and one sentence, declared once, in its section.
 * Names inside carry their unit; what owners write carries its own.
 */
import type * as z from 'zod';
import { choice, key, quantity, requiredKey, section, sectionsBy, zone } from './schema.ts';
import {
  pointSection,
  bankSection,
  chillerSection,
  deliverySection,
  cabinSection,
  comfortSection,
} from './site-plant.ts';
import { powerSection } from './site-power.ts';
import {
  brokerSection,
  planningSection,
  actuatorsSection,
  announceSection,
  webSection,
  storeSection,
  nightsSection,
  logSection,
} from './site-service.ts';
import { anyText, slug, currency, pointId } from './site-words.ts';

export { BANK_FORMS, type BankForm } from './site-plant.ts';

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
