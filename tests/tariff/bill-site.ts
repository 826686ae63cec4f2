/** A site file as its owner writes it, with a grid meter and the tariff in question. */
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';

export interface BillSite {
  readonly zone: string;
  readonly currency: string;
  /** What stands under `tariff:`, indented by four. */
  readonly tariff: string;
}

export function writeBillSite(folder: string, { zone, currency, tariff }: BillSite): void {
  const text = `site: {id: juniper, name: Juniper hut, zone: ${zone}, latitude: 38.4 deg, longitude: -2.9 deg, currency: ${currency}}
broker: {url: 'mqtt://127.0.0.1:1883'}
points:
  leaving-water: {topic: hut/leaving}
  chiller-power: {topic: hut/machine}
  room-temperature: {topic: hut/living}
  outdoor-temperature: {topic: hut/outdoor}
  grid-power: {topic: hut/grid}
bank: {form: ice-on-coil-external, water: 240 L, most-ice: 150 kg}
chiller: {ice-making: 1.05 kW, power: 0.55 kW}
delivery: {flow: 12 L/min}
power:
  tariff:${tariff}
store: {file: store.db}
`;
  writeFileSync(join(folder, 'site.yaml'), text);
}
