import { describe, expect, it } from 'vitest';
import { HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import { answer, neededUntilMs } from '../../src/web/page/answer.ts';
import { createFormat } from '../../src/web/page/format.ts';
import type { CycleRecord, PlanRecord } from '../../src/record.ts';
import type { NowAnswer } from '../../src/web/source.ts';
import { zoneOffsets } from '../../src/web/zone.ts';
import { createFakeSource } from './fake-source.ts';
import { EVENING, NOW_MS, ZONE } from './juniper-evening.ts';

const format = createFormat({ units: 'SI', currency: 'EUR', offsets: zoneOffsets(ZONE, NOW_MS) });
const base = createFakeSource().now();

function nowWith(record: Partial<CycleRecord>, plan: Partial<PlanRecord> = {}): NowAnswer {
  if (!base.record || !base.plan) throw new TypeError('the fake evening has a record and a plan');
  return {
    ...base,
    record: { ...base.record, ...record },
    plan: { ...base.plan, ...plan },
    zoneOffsets: [],
    access: { changes: false, signedIn: false },
  };
}

const headline = (now: NowAnswer): string => answer(now, NOW_MS, format).headline;
/** 00:30, the end of the last step that cools. */
const NEEDED_MS = EVENING.startMs + 12.5 * HOUR_MS;

describe('the sentence that the page opens with', () => {
  it('knows until when the plan needs ice', () => {
    expect(neededUntilMs(base.plan, NOW_MS, EVENING.endMs)).toBe(NEEDED_MS);
    expect(neededUntilMs(null, NOW_MS, EVENING.endMs)).toBeNull();
    expect(neededUntilMs(base.plan, NEEDED_MS, EVENING.endMs)).toBeNull();
  });

  it.each<[string, Partial<CycleRecord>]>([
    ['Ice until 01:40, 70 minutes to spare.', {}],
    ['Ice until 00:30, 0 minutes to spare.', { lastsUntilMs: NEEDED_MS }],
    ['Ice until 23:25, 65 minutes short.', { lastsUntilMs: NEEDED_MS - 65 * MINUTE_MS }],
    ['Ice until 22:00, 2 h 30 min short.', { lastsUntilMs: NEEDED_MS - 150 * MINUTE_MS }],
    ['Ice until Wed 17:00, 16 h 30 min to spare.', { lastsUntilMs: EVENING.startMs + 29 * HOUR_MS }],
    ['Ice for the whole night.', { lastsUntilMs: null }],
    ['No ice on hand.', { iceOnHandKwh: 0.02, iceOnHandLowKwh: 0, iceOnHandHighKwh: 0.04 }],
    ['Hardly any ice: 1.1 kWh at most.', { iceOnHandKwh: 0.02, iceOnHandLowKwh: 0, iceOnHandHighKwh: 1.1 }],
    [
      'Not sure of any ice: from none to 6.4 kWh may be in the bank.',
      { iceOnHandLowKwh: 0, iceOnHandHighKwh: 6.4, lastsUntilMs: null },
    ],
  ])('%s', (sentence, record) => {
    expect(headline(nowWith(record))).toBe(sentence);
  });

  it('is no surer than the low end of the plan', () => {
    const steps = (base.plan?.steps ?? []).map((step) => ({
      ...step,
      iceLowKwh: step.startMs >= NEEDED_MS - HOUR_MS ? 0 : 1,
    }));
    expect(headline(nowWith({}, { steps }))).toBe('Ice until 01:40, perhaps only until 23:30.');
    expect(headline(nowWith({ lastsUntilMs: null }, { steps }))).toBe(
      'Ice for the whole night, perhaps only until 23:30.',
    );
  });

  it('says so when the plan asks for no ice, and when nothing is measured', () => {
    expect(headline(nowWith({}, { steps: [] }))).toBe('Ice until 01:40; the plan asks for none before noon.');
    expect(headline({ ...nowWith({}), record: null })).toBe('Nothing is measured yet.');
  });

  it('gives the reason of the record and half of its interval', () => {
    const now = nowWith({ iceOnHandLowKwh: 5, iceOnHandHighKwh: 7.4, reason: 'Because.' });
    const words = answer(now, NOW_MS, format);
    expect(words.why).toBe('Cooling from ice since 19:30. Because.');
    expect(words.uncertain).toContain(
      'Give or take 1.2 kWh; one more point, entering-water, would narrow that most.',
    );
  });

  it('says what waiting costs and what would change its mind only while the plan’s own command runs', () => {
    const plan = { asides: ['Waiting an hour would cost EUR 0.04.'] };
    const step = base.plan?.steps.find(
      ({ startMs }) => startMs <= NOW_MS && NOW_MS < startMs + (base.plan?.slotMs ?? 0),
    );
    const command = step?.command ?? 'hold';
    const other = command === 'hold' ? 'discharge' : 'hold';
    expect(answer(nowWith({ command }, plan), NOW_MS, format).asides).toBe(plan.asides[0]);
    expect(answer(nowWith({ command: other }, plan), NOW_MS, format).asides).toBe('');
    expect(answer(nowWith({ command }), NOW_MS, format).asides).toBe('');
  });
});
