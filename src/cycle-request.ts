import { limitAt } from './comfort-hours.ts';
import type { SiteConfig } from './config.ts';
import { charges, commandFor, discharges, type Command, type Wish } from './commands.ts';
import { isHome, priceAt, type Stages, type Moment, type Planned, type CycleState } from './cycle-values.ts';
import type { Request } from './dispatch/types.ts';
import { roomWantsCooling, withWish } from './dispatch/wishes.ts';
import type { IceEstimate } from './estimation/types.ts';
import { commandAt } from './planning/plan.ts';
import { meanOverRooms } from './points.ts';
import { localClock } from './time.ts';

/** What is asked of the interlocks: the plan's command, changed by the room and then by the owner. */
export function requestOf(
  stages: Stages,
  state: CycleState,
  moment: Moment,
  wish: Wish | null,
  estimate: IceEstimate,
): Request {
  const { config } = stages;
  const { planned } = state;
  const planCommand = plannedCommand(config, planned, moment);
  const numbers = {
    iceOnHandKwh: estimate.iceOnHandKwh,
    iceOnHandLowKwh: estimate.lowKwh,
    iceOnHandHighKwh: estimate.highKwh,
    price: priceAt(planned?.prices ?? [], moment.nowMs)?.buy ?? null,
    eveningLoadKwh: planned?.forecast.eveningLoadKwh ?? null,
    worthOfIce: planned?.plan.worthOfIceMoneyPerKwh ?? null,
    waitCost: planned?.plan.waitCostMoney ?? null,
  };
  if (wish !== null) {
    const command = withWish(withRoom(stages, state, moment, planCommand), wish);
    const wished = `You wished ${WISH_ENDS[wish.name]} until ${localClock(config.site.zone, wish.untilMs)}.`;
    return { command, reason: wishReason(wish, config.site.zone), wished, numbers };
  }
  const command = withRoom(stages, state, moment, planCommand);
  const changedByRoom = discharges(planCommand) && !discharges(command);
  return {
    command,
    reason: changedByRoom
      ? roomReason(stages, moment, command)
      : planReason(stages, moment, planned, planCommand),
    numbers,
  };
}

/** The strategy's command for now; the plan's own later steps say what follows when it grows old. */
function plannedCommand(config: SiteConfig, planned: Planned | null, moment: Moment): Command {
  // Without a clock neither prices nor home hours mean anything: the room alone decides, with ice that is there.
  if (moment.clock.state === 'doubtful') return 'discharge';
  if (planned === null) return 'hold';
  return planned.strategy === 'planned'
    ? commandAt(planned.plan, moment.nowMs, roomIsNear(config, moment))
    : planned.command;
}

/** How far under the limit a room counts as soon to be cooled. */
const NEAR_LIMIT_K = 0.5;

function roomIsNear(config: SiteConfig, { nowMs, live }: Moment): boolean {
  const roomC = meanOverRooms(live, 'room-temperature');
  const limitC = limitAt(config.comfort, config.site.zone, nowMs);
  return roomC !== null && roomC > limitC - NEAR_LIMIT_K && isHome(config, live, nowMs);
}

function withRoom({ config }: Stages, state: CycleState, { nowMs, live }: Moment, asked: Command): Command {
  if (!discharges(asked)) return asked;
  const limitC = limitAt(config.comfort, config.site.zone, nowMs);
  const delivering = state.order !== null && discharges(state.order.command);
  const wants = roomWantsCooling(meanOverRooms(live, 'room-temperature'), limitC, delivering);
  return commandFor(charges(asked), wants);
}

const WISH_WORDS: Readonly<Record<Wish['name'], string>> = {
  none: '',
  'cool-now': 'cooling now',
  'save-ice': 'saving the ice',
  'make-ice': 'making ice',
  'stand-down': 'standing down',
};

/** After "You wished", where something holds the wish back. */
const WISH_ENDS: Readonly<Record<Wish['name'], string>> = {
  none: '',
  'cool-now': 'to cool now',
  'save-ice': 'to save the ice',
  'make-ice': 'to make ice',
  'stand-down': 'everything off',
};

function wishReason(wish: Wish, zone: string): string {
  return `As you wished, ${WISH_WORDS[wish.name]} until ${localClock(zone, wish.untilMs)}.`;
}

function roomReason({ config }: Stages, { nowMs, live }: Moment, command: Command): string {
  const roomC = meanOverRooms(live, 'room-temperature');
  const limitC = limitAt(config.comfort, config.site.zone, nowMs);
  const room = `The rooms are at ${shownC(config, roomC ?? limitC)}, under their limit of ${shownC(config, limitC)}`;
  return charges(command) ? `${room}: making ice, and none is melted.` : `${room}: the ice is kept.`;
}

function shownC(config: SiteConfig, c: number): string {
  return config.site.units === 'IP' ? `${(c * 1.8 + 32).toFixed(1)} °F` : `${c.toFixed(1)} °C`;
}

function planReason(
  { config }: Stages,
  { nowMs, live }: Moment,
  planned: Planned | null,
  command: Command,
): string {
  if (planned === null) return 'Waiting for the first plan.';
  if (command === planned.command) return planned.reason;
  if (charges(command) !== charges(planned.command) || !discharges(command)) {
    return `Going on with the plan made at ${localClock(config.site.zone, planned.plan.madeMs)}.`;
  }
  const limitC = limitAt(config.comfort, config.site.zone, nowMs);
  const roomC = meanOverRooms(live, 'room-temperature') ?? limitC;
  const making = charges(command) ? ', while making more' : '';
  const where = roomC > limitC ? 'over' : 'close to';
  return `The rooms are at ${shownC(config, roomC)}, ${where} their limit of ${shownC(config, limitC)}: cooling with ice that is there${making}.`;
}
