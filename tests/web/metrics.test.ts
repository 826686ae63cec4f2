import { describe, expect, it } from 'vitest';
import { openMetrics, prometheusText, wantsOpenMetrics } from '../../src/web/exposition.ts';
import { metricFamilies } from '../../src/web/metrics.ts';
import { createFakeSource } from './fake-source.ts';
import { NOW_MS } from './juniper-evening.ts';

const now = createFakeSource().now();
const families = metricFamilies(now, 12);

/** Rules read in prometheus/OpenMetrics, specification/OpenMetrics.md (1.0). */
function faultsOf(text: string): string[] {
  const faults: string[] = [];
  const lines = text.split('\n');
  if (lines.at(-1) !== '' || lines.at(-2) !== '# EOF') faults.push('must end "# EOF" and a line feed');
  const types = new Map<string, string>();
  let family = '';
  for (const line of lines.slice(0, -2)) {
    const meta = /^# (TYPE|UNIT|HELP) (\S+) (.*)$/.exec(line);
    if (meta?.[1] === 'TYPE') {
      if (types.has(meta[2])) faults.push(`${meta[2]} is interleaved or given twice`);
      types.set((family = meta[2]), meta[3]);
    } else if (meta) {
      if (meta[2] !== family) faults.push(`metadata of ${meta[2]} inside ${family}`);
      if (meta[1] === 'UNIT' && !family.endsWith(`_${meta[3]}`))
        faults.push(`${family} lacks its unit ${meta[3]}`);
    } else faults.push(...sampleFaults(line, family, types.get(family) ?? ''));
  }
  return faults;
}

function sampleFaults(line: string, family: string, type: string): string[] {
  const sample = /^([a-zA-Z_:][\w:]*)(\{(?:[a-zA-Z_]\w*="(?:[^"\\\n]|\\["\\n])*",?)*\})? (-?\d\S*)$/.exec(
    line,
  );
  if (!sample) return [`not a sample: ${line}`];
  const suffix = type === 'counter' ? '_total' : type === 'info' ? '_info' : '';
  const faults = sample[1] === family + suffix ? [] : [`${sample[1]} does not belong to ${family} (${type})`];
  if (type === 'stateset' && !['0', '1'].includes(sample[3])) faults.push(`${line}: a state is 0 or 1`);
  if (!Number.isFinite(Number(sample[3]))) faults.push(`${line}: not a number`);
  return faults;
}

describe('metrics', () => {
  it('keeps the rules of OpenMetrics 1.0', () => {
    expect(faultsOf(openMetrics(families))).toEqual([]);
  });

  it('would see a broken exposition', () => {
    const text = openMetrics(families);
    expect(faultsOf(text.replace('# EOF\n', ''))).not.toEqual([]);
    expect(
      faultsOf(
        text.replace('# UNIT rimehold_ice_on_hand_joules joules', '# UNIT rimehold_ice_on_hand_joules watts'),
      ),
    ).not.toEqual([]);
    expect(faultsOf(text.replace('rimehold_records_total', 'rimehold_records'))).not.toEqual([]);
  });

  it('gives the figures of the record in base units', () => {
    const text = openMetrics(families);
    const value = (name: string): number =>
      Number(
        text
          .split('\n')
          .find((line) => line.startsWith(name))
          ?.split(' ')
          .at(-1),
      );
    expect(value('rimehold_ice_on_hand_joules{bound="estimate"}')).toBeCloseTo(
      (now.record?.iceOnHandKwh ?? 0) * 3.6e6,
      0,
    );
    expect(value('rimehold_inventory_ratio')).toBeCloseTo((now.record?.inventoryPct ?? 0) / 100, 6);
    expect(value('rimehold_temperature_celsius{place="outdoor"}')).toBe(now.record?.outdoorC);
    expect(value('rimehold_record_timestamp_seconds')).toBe(NOW_MS / 1000);
    expect(value('rimehold_mode{rimehold_mode="discharging"}')).toBe(1);
    expect(value('rimehold_records_total')).toBe(12);
    expect(text).not.toContain('place="entering-water"');
  });

  it('speaks the older text form without units and end mark', () => {
    const text = prometheusText(families);
    expect(text).not.toMatch(/# UNIT|# EOF|stateset/);
    expect(text).toContain('# TYPE rimehold_records_total counter\n');
    expect(text.endsWith('\n')).toBe(true);
    expect(wantsOpenMetrics('application/openmetrics-text;version=1.0.0,text/plain;q=0.5')).toBe(true);
    expect(wantsOpenMetrics(undefined)).toBe(false);
  });

  it('has something to say before the first record', () => {
    const text = openMetrics(metricFamilies(createFakeSource('first-day').now(), 0));
    expect(faultsOf(text)).toEqual([]);
    expect(text).toContain('rimehold_broker{rimehold_broker="connected"} 1');
  });
});
