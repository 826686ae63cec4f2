/** What the owner has set: wish, strategy, comfort limit. Kept through restarts; a wish gives itself back. */
import { STRATEGIES, WISHES, type Strategy, type Wish, type WishName } from '../commands.ts';
import type { SiteConfig } from '../config.ts';
import { RimeholdError } from '../errors.ts';
import { formatDuration, HOUR_MS, MINUTE_MS } from '../time.ts';

export interface OwnerSettings {
  readonly wish: Wish;
  readonly wishForMs: number;
  readonly strategy: Strategy;
  readonly limitC: number;
}

const LEAST_WISH_MS = 5 * MINUTE_MS;
const MOST_WISH_MS = 24 * HOUR_MS;
const LIMIT_RANGE_C = [18, 32] as const;
const NO_WISH: Wish = { name: 'none', untilMs: 0 };

export class Owner {
  #settings: OwnerSettings;

  constructor(config: SiteConfig, remembered: string | null) {
    const fresh: OwnerSettings = {
      wish: NO_WISH,
      wishForMs: 2 * HOUR_MS,
      strategy: config.planning.strategy,
      limitC: config.comfort.limitC,
    };
    this.#settings = remembered === null ? fresh : { ...fresh, ...readable(remembered) };
  }

  settings(nowMs: number): OwnerSettings {
    const { wish } = this.#settings;
    if (wish.name !== 'none' && nowMs >= wish.untilMs) this.#settings = { ...this.#settings, wish: NO_WISH };
    return this.#settings;
  }

  /** What a cycle is to know of it. */
  wanted(nowMs: number): { wish: Wish | null; strategy: Strategy } {
    const { wish, strategy } = this.settings(nowMs);
    return { wish: wish.name === 'none' ? null : wish, strategy };
  }

  /** Takes a wish for a time; `none` gives back. Throws `usage` outside five minutes to a day. */
  wish(name: WishName, durationMs: number, nowMs: number): Wish {
    if (name !== 'none') checkWishTime(durationMs);
    const wish = name === 'none' ? NO_WISH : { name, untilMs: nowMs + durationMs };
    this.#settings = { ...this.#settings, wish };
    return wish;
  }

  /** How long the next wish holds; a wish that holds now is counted anew from now. Throws `usage` outside five minutes to a day. */
  wishFor(durationMs: number, nowMs: number): void {
    checkWishTime(durationMs);
    const { wish } = this.settings(nowMs);
    if (wish.name !== 'none') this.wish(wish.name, durationMs, nowMs);
    this.#settings = { ...this.#settings, wishForMs: durationMs };
  }

  strategy(strategy: Strategy): void {
    this.#settings = { ...this.#settings, strategy };
  }

  /** Throws `usage` outside 18 to 32 °C. */
  limit(limitC: number): void {
    const [least, most] = LIMIT_RANGE_C;
    if (!(limitC >= least && limitC <= most)) {
      throw new RimeholdError(
        'usage',
        `Expected a comfort limit between ${least} and ${most} °C, found ${limitC}.`,
        { limitC },
      );
    }
    this.#settings = { ...this.#settings, limitC };
  }

  memory(): string {
    return JSON.stringify(this.#settings);
  }
}

function checkWishTime(durationMs: number): void {
  if (durationMs >= LEAST_WISH_MS && durationMs <= MOST_WISH_MS) return;
  throw new RimeholdError(
    'usage',
    `Expected a wish for 5 minutes to 24 hours (PT5M to PT24H), found ${formatDuration(durationMs)}; choose a time in between.`,
    { durationMs },
  );
}

/** What can be read of remembered settings; a damaged memory is as good as none. */
function readable(remembered: string): Partial<OwnerSettings> {
  const value = parsed(remembered);
  const wish = value['wish'] as Partial<Wish> | undefined;
  const wishIsSound = WISHES.includes(wish?.name as WishName) && typeof wish?.untilMs === 'number';
  return {
    ...(wishIsSound ? { wish: wish as Wish } : {}),
    ...(STRATEGIES.includes(value['strategy'] as Strategy)
      ? { strategy: value['strategy'] as Strategy }
      : {}),
    ...(typeof value['limitC'] === 'number' ? { limitC: value['limitC'] } : {}),
    ...(typeof value['wishForMs'] === 'number' && value['wishForMs'] <= MOST_WISH_MS
      ? { wishForMs: value['wishForMs'] }
      : {}),
  };
}

function parsed(text: string): Record<string, unknown> {
  try {
    const value: unknown = JSON.parse(text);
    return typeof value === 'object' && value !== null ? (value as Record<string, unknown>) : {};
  } catch {
    return {};
  }
}

/** A site with the owner's limit in place of that of its file. */
export function withLimit(config: SiteConfig, limitC: number): SiteConfig {
  return { ...config, comfort: { ...config.comfort, limitC } };
}
