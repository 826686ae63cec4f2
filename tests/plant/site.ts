import { parseSiteFile } from '../../src/site-file.ts';
import type { BankForm, SiteConfig } from '../../src/config.ts';

const lines = (entries: Readonly<Record<string, string>>): string =>
  Object.entries(entries)
    .map(([key, value]) => `  ${key}: ${value}`)
    .join('\n');

/** A small cabin site of figures close to Juniper's, complete by defaults. */
export function siteOf(
  form: BankForm = 'ice-on-coil-external',
  bank: Readonly<Record<string, string>> = {},
  more: { readonly points?: readonly string[]; readonly chiller?: Readonly<Record<string, string>> } = {},
): SiteConfig {
  const points = new Set([
    'leaving-water',
    'chiller-power',
    'room-temperature',
    'outdoor-temperature',
    ...(more.points ?? []),
  ]);
  const parsed = parseSiteFile(`
site: { id: hut, name: Hut, zone: Europe/Madrid, latitude: 38.4 deg, longitude: -2.9 deg, elevation: 1080 m }
points:
${[...points].map((point) => `  ${point}: { topic: hut/${point} }`).join('\n')}
bank:
${lines({
  form,
  water: '240 L',
  'most-ice': '150 kg',
  'heat-leak': '2.2 W/K',
  'melt-conductance': '450 W/K',
  'freeze-conductance': '180 W/K',
  'water-area': '0.32 m2',
  ...bank,
})}
chiller:
${lines({ 'ice-making': '1.05 kW', power: '0.55 kW', ...more.chiller })}
delivery: { flow: 12 L/min }
power: { tariff: { default: 0.2 } }
`);
  if (!parsed.ok)
    throw new Error(parsed.faults.map((fault) => `${fault.path}: ${fault.sentence}`).join('\n'));
  return parsed.config;
}
