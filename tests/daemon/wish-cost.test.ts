/** What a wish is said to cost: lost cooling is said first, and nothing that departs from the plan is said to save. */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import type { SiteConfig } from '../../src/config.ts';
import { wishCost } from '../../src/daemon/wish-cost.ts';
import type { PlanStep } from '../../src/record.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { HOUR_MS } from '../../src/time.ts';
import { costSentence } from '../../src/web/page/wish-form.ts';
import { createFormat } from '../../src/web/page/format.ts';
import { every, plant, problem, scenario } from '../planning/problems.ts';
import { createFakeSource } from '../web/fake-source.ts';
import { NOW_MS } from '../web/juniper-evening.ts';

const SLOT_MS = HOUR_MS / 4;

function juniper(): SiteConfig {
  const parsed = parseSiteFile(readFileSync(join(import.meta.dirname, '../../config/juniper.yaml'), 'utf8'));
  if (!parsed.ok) throw new Error('config/juniper.yaml has faults');
  return parsed.config;
}

const step = (k: number, parts: Partial<PlanStep>): PlanStep => ({
  startMs: NOW_MS + k * SLOT_MS,
  command: 'hold',
  iceKwh: 6,
  iceLowKwh: 5,
  iceHighKwh: 7,
  priceMoneyPerKwh: 0.2,
  outdoorC: 25,
  outdoorLowC: 24,
  outdoorHighC: 26,
  loadW: 0,
  loadLowW: 0,
  loadHighW: 0,
  ...parts,
});

/** A plan of `steps`, a bank of 6 kWh whose coil gives 2 kW at most, and a machine of 2 kW of ice for 1 kW of power. */
function view(steps: readonly PlanStep[], worthOfIceMoneyPerKwh = 0.1): Parameters<typeof wishCost>[0] {
  const { record, plan } = createFakeSource().now();
  if (!record || !plan) throw new TypeError('the fake evening has a record and a plan');
  const config = juniper();
  const ground = problem(144, {
    scenarios: [{ ...scenario(144, { loadW: every(144, () => 1000) }), warmKhPerKwh: 2 }],
    plant: {
      ...plant({ capacityKwh: 14 }),
      meltLimitW: () => 2000,
      operate: () => ({ iceMakingW: 2000, powerW: 1000 }),
    },
    warmHourMoney: 0.5,
  });
  return {
    config,
    last: { record: { ...record, atMs: NOW_MS, iceOnHandKwh: 6 } },
    plan: { ...plan, strategy: 'planned', slotMs: SLOT_MS, steps, worthOfIceMoneyPerKwh },
    state: { planned: { problem: ground } },
  };
}

const slots = (count: number, parts: Partial<PlanStep>, from = 0): PlanStep[] =>
  Array.from({ length: count }, (_, k) => step(from + k, parts));

describe('what a wish costs', () => {
  it('says first what cooling falls out and how warm that makes the rooms', () => {
    const cooling = slots(8, { command: 'discharge', loadW: 1500 });
    const making = slots(8, { command: 'charge-now' }, 8);
    const down = wishCost(view([...cooling, ...making]), 'stand-down', 4 * HOUR_MS);
    // 2 h of 1.5 kW and 2 K h a kWh at 0.50; 4 kWh unmade and 3 kept at 0.10, 2 kWh of power at 0.20
    expect(down.sentence).toBe(
      'The rooms would go without 2.0 h of cooling, 3.00 kWh, and get warmer: about 6.0 K h more above their limit, which the plan counts as 3.00 EUR. 2.0 h of making ice fall out, 4.00 kWh.',
    );
    expect(down.costMoney).toBeCloseTo(0.1 - 0.4, 9);
    const format = createFormat({ units: 'SI', currency: 'EUR', offsets: [] });
    expect(costSentence(down, format)).toMatch(
      /In power and ice alone it spares about 0\.30 EUR; the rooms pay for it\.$/,
    );
    const save = wishCost(view(cooling), 'save-ice', 2 * HOUR_MS);
    expect(save.sentence).toMatch(/^The rooms would go without 2\.0 h of cooling/);
    expect(save.coolsLess).toBe(true);
  });

  it('counts what the coil can take, less what the plan has for the rooms anyway', () => {
    expect(wishCost(view(slots(8, {})), 'cool-now', HOUR_MS).costMoney).toBeCloseTo(0.2, 9);
    const open = slots(8, { command: 'discharge', loadW: 0 });
    expect(wishCost(view(open), 'cool-now', HOUR_MS).sentence).toContain('Up to 2.00 kWh of ice more');
    const cooling = slots(8, { command: 'discharge', loadW: 1500 });
    expect(wishCost(view(cooling), 'cool-now', HOUR_MS).sentence).toContain('Up to 0.50 kWh of ice more');
  });

  it('does not let ice made now save against a plan that makes it later for less', () => {
    const later = [...slots(4, {}), ...slots(4, { command: 'charge-now', priceMoneyPerKwh: 0.15 }, 4)];
    // 1 kWh of power at 0.20 now against 0.15 later for the same 2 kWh of ice, whatever it is worth at the margin
    expect(wishCost(view(later, 0.3), 'make-ice', HOUR_MS).costMoney).toBeCloseTo(0.05, 9);
    expect(wishCost(view(slots(8, {}), 0.3), 'make-ice', HOUR_MS).costMoney).toBe(0);
  });
});
