/**
 * The sea, whole: one tick of truth, in order. `perceive` reads the sensors of tick n; `advance` takes
 * the steers of tick n, ends the hearings they judge, sends what is due, moves every body to n + 1 and
 * collects the frames whose last bit arrived by then.
 *
 * A pure function of plan and steers: every draw is by count, every order is fixed, time is the tick
 * number times its length. The agents' mathematics stands elsewhere, and none of it is used here.
 */
import { degFromRad } from '../../messages/angles.ts';
import { assert } from '../../messages/assert.ts';
import type { HeardFrame, Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';
import { moveBody, type BodyOrder } from './body.ts';
import { startDraw, type Draw } from './draw.ts';
import { addedCurrents, changesAt, compassBiasAt, logScaleAt, ordersAt, rebootAt } from './faults.ts';
import { endArrivals, sendFrames, startModem, type Delivery, type ModemState } from './modem.ts';
import type { SeaPlan } from './plan.ts';
import type { Hearing, Reboot, Sea, Truth } from './sea.ts';
import {
  depthReading,
  drawBiases,
  onboardTimeS,
  readCompassAndLog,
  readFix,
  startFixes,
  type FixState,
} from './sensors.ts';
import { soundSpeedMps } from './sound.ts';
import { currentAt, type Water } from './water.ts';

/** Depth at which the sound speed is taken: half of the water, 100 m at most. */
const SOUND_DEPTH_MAX_M = 100;

/** Steps in which the battery gauge shows its share. */
const BATTERY_STEPS = 1e6;

interface State {
  readonly plan: SeaPlan;
  readonly draw: Draw;
  readonly truth: Truth;
  readonly fixes: FixState;
  readonly modem: ModemState;
  readonly scratch: Float64Array;
  readonly water: Water;
  /** Biases as drawn, which faults upset. */
  readonly ownBiasRad: Float64Array;
  readonly ownScale: Float64Array;
  /** The last order of each vehicle, which its body keeps while its agent is down. */
  readonly orders: BodyOrder[];
  readonly counts: { tick: number };
  /** Frames that the senses of the current tick hold. */
  deliveries: Delivery[];
  hearings: Hearing[];
  senses: (Sense | null)[] | null;
}

function startTruth(plan: SeaPlan, draw: Draw): Truth {
  const column = (of: (index: number) => number): Float64Array =>
    Float64Array.from(plan.vehicles, (_vehicle, index) => of(index));
  const biases = plan.vehicles.map((vehicle, index) => drawBiases(draw, vehicle, index));
  return {
    eastM: column((index) => plan.vehicles[index]!.startEastM),
    northM: column((index) => plan.vehicles[index]!.startNorthM),
    depthM: column((index) => plan.vehicles[index]!.startDepthM),
    headingRad: column((index) => plan.vehicles[index]!.startHeadingRad),
    speedMps: column(() => 0),
    currentEastMps: column(() => 0),
    currentNorthMps: column(() => 0),
    battery: column(() => 1),
    energyJ: column(() => 0),
    compassBiasRad: column((index) => biases[index]!.biasRad),
    logScale: column((index) => biases[index]!.scale),
  };
}

/** A sea at tick 0. */
export function startSea(plan: SeaPlan): Sea {
  const draw = startDraw(plan.seed);
  const { temperatureDegC, salinityPsu, depthM } = plan.water;
  const truth = startTruth(plan, draw);
  const state: State = {
    plan,
    draw,
    truth,
    water: { currents: plan.currents, added: addedCurrents(plan.faults) },
    ownBiasRad: truth.compassBiasRad.slice(),
    ownScale: truth.logScale.slice(),
    orders: plan.vehicles.map((vehicle) => ({
      heading_deg: degFromRad(vehicle.startHeadingRad),
      speed_mps: 0,
      depth_m: vehicle.startDepthM,
    })),
    fixes: startFixes(draw, plan.vehicles),
    modem: startModem(
      plan,
      soundSpeedMps(temperatureDegC, salinityPsu, Math.min(depthM / 2, SOUND_DEPTH_MAX_M)),
    ),
    scratch: new Float64Array(2),
    counts: { tick: 0 },
    deliveries: [],
    hearings: [],
    senses: null,
  };
  renewTruth(state);
  return {
    get tick() {
      return state.counts.tick;
    },
    get framesSent() {
      return state.modem.counts.framesSent;
    },
    tickS: plan.tickS,
    truth: state.truth,
    perceive: () => perceive(state),
    advance: (steers) => advance(state, steers),
    reboots: () => rebootsNow(state),
    changes: () =>
      changesAt(plan.faults, plan.orders, { timeS: state.counts.tick * plan.tickS, tickS: plan.tickS }),
    takeHearings: () => state.hearings.splice(0),
    currentAt: (eastM, northM, timeS, out) => currentAt(state.water, { eastM, northM, timeS }, out),
  };
}

function isDown(state: State, index: number, tick: number): boolean {
  return tick >= 0 && rebootAt(state.plan.faults, index, tick * state.plan.tickS) !== null;
}

/** Agents that were up in the last tick and are down in this, or the other way round. */
function rebootsNow(state: State): Reboot[] {
  const { plan, counts } = state;
  if (!plan.faults.some(({ kind }) => kind === 'reboot')) return [];
  return plan.vehicles.flatMap((_vehicle, index): Reboot[] => {
    const before = isDown(state, index, counts.tick - 1);
    const now = isDown(state, index, counts.tick);
    if (before === now) return [];
    const at = now ? counts.tick : counts.tick - 1;
    return [
      { index, phase: now ? 'down' : 'up', memory: rebootAt(plan.faults, index, at * plan.tickS) ?? 'lost' },
    ];
  });
}

/** The senses of the current tick; asked again, the same ones. */
function perceive(state: State): readonly (Sense | null)[] {
  if (state.senses !== null) return state.senses;
  const { plan, truth, draw, scratch, fixes } = state;
  const { tick } = state.counts;
  const heard: HeardFrame[][] = plan.vehicles.map(() => []);
  for (const { toIndex, frame } of state.deliveries) heard[toIndex]!.push(frame);
  state.senses = plan.vehicles.map((vehicle, index) => {
    const at = { draw, plan: vehicle, truth, index, tick, tickS: plan.tickS, faults: plan.faults, scratch };
    const fix = readFix(at, fixes);
    if (isDown(state, index, tick)) return null;
    const { heading_deg, speed_mps } = readCompassAndLog(at);
    return {
      tick,
      at_s: onboardTimeS(vehicle, tick * plan.tickS),
      heading_deg,
      speed_mps,
      depth_m: depthReading(truth.depthM[index]!),
      battery: Math.round(truth.battery[index]! * BATTERY_STEPS) / BATTERY_STEPS,
      fix,
      heard: heard[index]!,
      orders: ordersAt(plan.orders, index, { timeS: tick * plan.tickS, tickS: plan.tickS }),
    };
  });
  return state.senses;
}

/** Applies the steers of the current tick and moves to the next. */
function advance(state: State, steers: readonly (Steer | null)[]): void {
  const { plan, truth, modem, draw, scratch, counts, water, orders } = state;
  assert(steers.length === plan.vehicles.length, 'there is a steer for every vehicle');
  const senses = perceive(state);
  const timeS = counts.tick * plan.tickS;
  judgeHearings(state, steers);
  steers.forEach((steer, index) => {
    assert((steer === null) === (senses[index] === null), 'who perceives steers, and nobody else');
    if (steer === null) {
      modem.waiting[index] = null;
      return;
    }
    assert(steer.tick <= counts.tick, 'a steer answers the current tick, or stands in for a late one');
    orders[index] = steer;
    if (steer.say !== null) modem.waiting[index] = steer.say;
  });
  sendFrames(modem, truth, { draw, timeS });
  plan.vehicles.forEach((vehicle, index) => {
    moveBody({
      truth,
      index,
      plan: vehicle,
      water,
      order: orders[index]!,
      timeS,
      tickS: plan.tickS,
      scratch,
    });
  });
  counts.tick += 1;
  renewTruth(state);
  state.senses = null;
  state.deliveries = [];
  endArrivals(modem, counts.tick * plan.tickS, {
    deliveries: state.deliveries,
    hearings: state.hearings,
    isDown: (index) => isDown(state, index, counts.tick),
  });
}

/** What reached an agent was `heard` if the agent used it, `garbled` if it was, `refused` otherwise. */
function judgeHearings(state: State, steers: readonly (Steer | null)[]): void {
  const place = new Array<number>(steers.length).fill(0);
  for (const { toIndex, hearing } of state.deliveries) {
    const said = steers[toIndex]?.heard[place[toIndex]!++];
    const refused = hearing.fate === 'heard' && said !== 'used';
    state.hearings.push(refused ? { ...hearing, fate: 'refused' } : hearing);
  }
}

/** Renews what follows from place, time and the script: the current at every vehicle, and its biases. */
function renewTruth(state: State): void {
  const { truth, plan, scratch } = state;
  const timeS = state.counts.tick * plan.tickS;
  for (let index = 0; index < plan.vehicles.length; index++) {
    currentAt(state.water, { eastM: truth.eastM[index]!, northM: truth.northM[index]!, timeS }, scratch);
    truth.currentEastMps[index] = scratch[0]!;
    truth.currentNorthMps[index] = scratch[1]!;
    truth.compassBiasRad[index] = compassBiasAt(plan.faults, index, {
      timeS,
      ownRad: state.ownBiasRad[index]!,
    });
    truth.logScale[index] = logScaleAt(plan.faults, index, { timeS, own: state.ownScale[index]! });
  }
}
