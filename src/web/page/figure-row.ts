/** The figures of the newest record, as one ruled line of the logbook. */
import type { CycleRecord } from '../../record.ts';
import { figure, h } from './dom.ts';
import { plain, type Format } from './format.ts';
import { strings } from './strings.ts';

const words = strings.figures;

const pair = (name: string, value: number | null, text: string): HTMLElement =>
  h('div', {}, h('dt', {}, name), h('dd', {}, figure(value, text)));

export function figureRow(record: CycleRecord, format: Format): HTMLElement {
  const ice = words.range(
    format.energy(record.iceOnHandKwh),
    format.energyFigure(record.iceOnHandLowKwh),
    format.energyFigure(record.iceOnHandHighKwh),
  );
  const inventory = words.inventoryText(plain(record.inventoryPct, 0), format.value(record.iceKg, 'kg'));
  const room = words.roomText(format.temperature(record.roomC), format.temperatureFigure(record.limitC));
  return h(
    'dl',
    {},
    pair(words.ice, record.iceOnHandKwh, ice),
    pair(words.inventory, record.inventoryPct, inventory),
    pair(words.leaving, record.leavingWaterC, format.temperature(record.leavingWaterC)),
    pair(words.room, record.roomC, room),
    pair(words.outdoor, record.outdoorC, format.temperature(record.outdoorC)),
    pair(words.price, record.priceMoneyPerKwh, format.price(record.priceMoneyPerKwh)),
    pair(words.worth, record.worthOfIceMoneyPerKwh, format.price(record.worthOfIceMoneyPerKwh)),
  );
}
