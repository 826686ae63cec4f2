import { limitAt } from './comfort-hours.ts';
import type { SiteConfig } from './config.ts';
import { charges, commandFor, discharges, type Command, type Wish } from './commands.ts';
import { priceAt, type Stages, type Moment, type Planned, type CycleState } from './cycle-values.ts';
import type { Request } from './dispatch/types.ts';
import { roomWantsCooling, withWish } from './dispatch/wishes.ts';
import type { IceEstimate } from './estimation/types.ts';
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
  const planCommand = plannedCommand(planned, moment);
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
    return { command, reason: wishReason(wish, config.site.zone), numbers };
  }
  const command = withRoom(stages, state, moment, planCommand);
  const changedByRoom = discharges(planCommand) && !discharges(command);
  return {
    command,
    reason: changedByRoom ? roomReason(stages, moment, command) : planReason(planned, planCommand),
    numbers,
  };
}

/** The strategy's command for the slot of now; later slots of an old plan are taken from its steps. */
function plannedCommand(planned: Planned | null, { nowMs, clock }: Moment): Command {
  // Without a clock neither prices nor home hours mean anything: the room alone decides, with ice that is there.
  if (clock.state === 'doubtful') return 'discharge';
  if (planned === null) return 'hold';
  if (nowMs < planned.plan.madeMs + planned.plan.slotMs) return planned.command;
  const step = planned.plan.steps.findLast((candidate) => candidate.startMs <= nowMs);
  return step?.command ?? 'hold';
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

function wishReason(wish: Wish, zone: string): string {
  return `As you wished, ${WISH_WORDS[wish.name]} until ${localClock(zone, wish.untilMs)}.`;
}

function roomReason({ config }: Stages, { nowMs, live }: Moment, command: Command): string {
  const roomC = meanOverRooms(live, 'room-temperature');
  const limitC = limitAt(config.comfort, config.site.zone, nowMs);
  const room = `The rooms are at ${shownC(config, roomC ?? limitC)}, under their limit of ${shownC(config, limitC)}`;
  return charges(command) ? `${room}: making ice, and none is spent.` : `${room}: the ice is kept.`;
}

function shownC(config: SiteConfig, c: number): string {
  return config.site.units === 'IP' ? `${(c * 1.8 + 32).toFixed(1)} °F` : `${c.toFixed(1)} °C`;
}

function planReason(planned: Planned | null, command: Command): string {
  if (planned === null) return 'Waiting for the first plan.';
  return command === planned.command
    ? planned.reason
    : 'Going on with the last plan until the next one is made.';
}
