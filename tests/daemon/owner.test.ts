/** What the owner sets: bounded, and kept in a memory that may be damaged. */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { Owner } from '../../src/daemon/owner.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../../src/time.ts';

function owner(remembered: string | null = null): Owner {
  const parsed = parseSiteFile(readFileSync(join(import.meta.dirname, '../../config/juniper.yaml'), 'utf8'));
  if (!parsed.ok) throw new Error('config/juniper.yaml has faults');
  return new Owner(parsed.config, remembered);
}

describe('how long a wish holds', () => {
  it.each([5 * MINUTE_MS, DAY_MS])('may be %d ms', (durationMs) => {
    const made = owner();
    made.wishFor(durationMs, 0);
    expect(made.settings(0).wishForMs).toBe(durationMs);
  });

  it.each([0, 5 * MINUTE_MS - 1, DAY_MS + 1, 900 * HOUR_MS, Number.NaN])(
    'may not be %d ms, wish or no wish',
    (durationMs) => {
      const made = owner();
      expect(() => made.wishFor(durationMs, 0)).toThrow(/PT5M to PT24H/);
      expect(() => made.wish('cool-now', durationMs, 0)).toThrow(/PT5M to PT24H/);
      expect(made.settings(0)).toMatchObject({ wishForMs: 2 * HOUR_MS, wish: { name: 'none' } });
    },
  );

  it('is not taken from a memory that was written before it was bounded', () => {
    expect(owner(JSON.stringify({ wishForMs: 900 * HOUR_MS })).settings(0).wishForMs).toBe(2 * HOUR_MS);
  });
});
