/**
 * An order that the interlocks have cleared. Only `dispatch/interlocks.ts` can make one: the brand's symbol is not
 * exported as a value, so a publisher that takes a `ClearedCommand` cannot be handed anything else; by type.
 */
import type { Command } from './commands.ts';

declare const cleared: unique symbol;

export const MACHINES = ['chiller', 'pump', 'fan'] as const;
export type Machine = (typeof MACHINES)[number];

export interface ClearedCommand {
  readonly command: Command;
  readonly reason: string;
  readonly issuedMs: number;
  /** An actuator that has heard nothing newer by then goes to off by itself. */
  readonly expiresMs: number;
  /** The interlock that changed what was asked for, in words; empty when none did. */
  readonly heldBackBy: string;
  readonly switches: Readonly<Record<Machine, boolean>>;
  /** The figures behind the decision, for the published order and the record. */
  readonly numbers: Readonly<Record<string, number | null>>;
  readonly [cleared]: true;
}
