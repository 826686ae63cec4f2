/** What a night cannot tell: savings and the share of the residual rest on the ice at its start and on all of its hours. */
import { ICE_KG_PER_KWH } from './account.ts';
import type { NightSheet } from './night-schema.ts';

/** A 90 % interval wider than this part of a full bank is a guess. */
const GUESSED = 0.5;

/** Why savings and the residual's percentage are not known; empty when they are. */
export function whyNotKnown({ whole, ice }: Pick<NightSheet, 'whole' | 'ice'>): string {
  if (isGuessed(ice)) return 'how much ice there was at the start was only guessed';
  return whole ? '' : 'the night is recorded in part';
}

/** The balance without what a guess would make of it: the kWh stay, the percentage goes, and on a guessed start the culprit too. */
export function balanceAsKnown(
  balance: NightSheet['balance'],
  { whole, ice }: Pick<NightSheet, 'whole' | 'ice'>,
): NightSheet['balance'] {
  const why = whyNotKnown({ whole, ice });
  if (why === '') return balance;
  const culprit = isGuessed(ice) ? '' : balance.culprit;
  const look = culprit === '' ? '' : `; first to look at: ${culprit}`;
  const sentence = `How well the balance closes is not known: ${why}${look}.`;
  return { ...balance, residualPct: null, verdict: 'unknown', culprit, sentence };
}

function isGuessed({ mostKg, startLowKwh, startHighKwh }: NightSheet['ice']): boolean {
  return !(startHighKwh - startLowKwh <= (GUESSED * mostKg) / ICE_KG_PER_KWH);
}
