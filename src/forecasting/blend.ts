/**
 * A hub's forecast beside the own one. Its bias is learned by lead and taken out (an uncorrected bias costs double-digit
 * per cent: Grant & Gehbauer 2022, SimBuild C026); then both are weighed so that the squared error of the past would have
 * been least (Bates & Granger 1969, "The combination of forecasts"). Leads are pooled in bands.
 */
import type { Issue } from './issues.ts';

const BAND_HOURS = 6;
/** Before anything is known: spread of a hub's and of the own forecast a day ahead, K; counted as this many issues. */
const PRIOR_HUB_SD_K = 2;
const PRIOR_OWN_SD_K = 3;
const PRIOR_ISSUES = 8;

export interface Blend {
  /** Added to the hub's temperature, K. */
  readonly biasK: number;
  /** Weight of the corrected hub, 0–1. */
  readonly hubWeight: number;
  readonly hubSdK: number;
  readonly ownSdK: number;
  /** Issues of the hub that have been compared with what came. */
  readonly issues: number;
}

export type ActualC = (hour: number) => number | null;

interface Sums {
  issues: number;
  hub: number;
  hubHub: number;
  ownOwn: number;
  hubOwn: number;
}

/** Blends by band of leads: band 0 holds leads 1 to 6. */
export function learnBlends(issues: readonly Issue[], actualC: ActualC, leads: number): Blend[] {
  const bands = Array.from({ length: Math.ceil(leads / BAND_HOURS) }, () => newSums());
  for (const issue of issues) {
    if (!issue.hubC) continue;
    for (const [band, sums] of bands.entries()) addIssue(sums, issue, actualC, band);
  }
  return bands.map(blendOf);
}

export const blendAt = (blends: readonly Blend[], lead: number): Blend =>
  blends[Math.min(blends.length - 1, Math.floor((lead - 1) / BAND_HOURS))];

/** The blended temperature of a lead; the own one where the hub gives none. */
export function blended(blends: readonly Blend[], lead: number, ownC: number, hubC: number | null): number {
  if (hubC === null) return ownC;
  const { biasK, hubWeight } = blendAt(blends, lead);
  return hubWeight * (hubC + biasK) + (1 - hubWeight) * ownC;
}

const newSums = (): Sums => ({ issues: 0, hub: 0, hubHub: 0, ownOwn: 0, hubOwn: 0 });

/** Hours of one issue and band go together: their means count as one. */
function addIssue(sums: Sums, issue: Issue, actualC: ActualC, band: number): void {
  const part = newSums();
  let count = 0;
  for (let lead = band * BAND_HOURS + 1; lead <= (band + 1) * BAND_HOURS; lead += 1) {
    const actual = actualC(issue.hour + lead);
    const hubC = issue.hubC?.[lead - 1] ?? null;
    const ownC = issue.outdoorC[lead - 1];
    if (actual === null || hubC === null || ownC === undefined) continue;
    part.hub += actual - hubC;
    part.hubHub += (actual - hubC) ** 2;
    part.ownOwn += (actual - ownC) ** 2;
    part.hubOwn += (actual - hubC) * (actual - ownC);
    count += 1;
  }
  if (count === 0) return;
  sums.issues += 1;
  sums.hub += part.hub / count;
  sums.hubHub += part.hubHub / count;
  sums.ownOwn += part.ownOwn / count;
  sums.hubOwn += part.hubOwn / count;
}

function blendOf(sums: Sums): Blend {
  const n = sums.issues;
  const biasK = sums.hub / (n + PRIOR_ISSUES);
  const total = n + PRIOR_ISSUES;
  const raw = n > 0 ? sums.hubHub - n * (sums.hub / n) ** 2 : 0;
  const hub = (Math.max(0, raw) + PRIOR_ISSUES * PRIOR_HUB_SD_K ** 2) / total;
  const own = (sums.ownOwn + PRIOR_ISSUES * PRIOR_OWN_SD_K ** 2) / total;
  const both = sums.hubOwn / total;
  const weight = (own - both) / Math.max(1e-6, hub + own - 2 * both);
  return {
    biasK,
    hubWeight: Math.min(1, Math.max(0, weight)),
    hubSdK: Math.sqrt(hub),
    ownSdK: Math.sqrt(own),
    issues: n,
  };
}

/** The hub's series at the middle of each hour of lead, linear between its points; null outside them. */
export function hubByLead(
  series: readonly { readonly atMs: number; readonly temperatureC: number }[],
  lastHour: number,
  leads: number,
): (number | null)[] {
  const points = series
    .filter((point) => Number.isFinite(point.temperatureC))
    .toSorted((a, b) => a.atMs - b.atMs);
  return Array.from({ length: leads }, (_, i) => {
    const atMs = (lastHour + i + 1.5) * 3_600_000;
    const after = points.findIndex((point) => point.atMs >= atMs);
    if (after < 0) return null;
    const high = points[after];
    if (high.atMs === atMs) return high.temperatureC;
    if (after === 0) return null;
    const low = points[after - 1];
    return (
      low.temperatureC + ((high.temperatureC - low.temperatureC) * (atMs - low.atMs)) / (high.atMs - low.atMs)
    );
  });
}
