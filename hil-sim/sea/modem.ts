/**
 * Frames on the water: slots by the sender's own clock, air time, travel time, half duplex, overlap,
 * and the moment at which each hearer has the last bit.
 *
 * A round is N slots; slot k is that of vehicle k; round 0 begins at onboard time 0. A frame ordered in
 * the steer to sense n leaves in the next own slot that begins at or after tick n; a newer one takes
 * the place of one still waiting. On the water a frame lasts turn-on + 8·bytes/rate; its last bit
 * arrives a travel time later, from the distance at the tick of sending. Two frames that overlap at a
 * hearer are lost to it both (`collided`); one that overlaps its own sending, or meets an agent that is
 * down, is too (`deaf`). Delay and repetition of the link come after reception: a frame that is held by
 * them collides with nothing any more. A modem hands over as many frames in a tick as a sense has room
 * for, the rest a tick later.
 */
import { assert } from '../../messages/assert.ts';
import type { HeardFrame } from '../../messages/sense.ts';
import { garble, nextFate, startLinks, type LinkFate, type LinkState } from './channel.ts';
import type { Draw } from './draw.ts';
import { linkAt } from './faults.ts';
import type { SeaPlan, VehiclePlan } from './plan.ts';
import type { FrameFate, Hearing, Truth } from './sea.ts';
import { onboardTimeS } from './sensors.ts';

const SLOT_TOLERANCE_S = 1e-9;
const PAIR_KEY = 16;
/** Steps per second in which a modem tells when it heard. */
const HEARD_STEPS = 1e6;
/** Frames that a sense has room for. */
const HANDED_OVER_MOST = 64;
/** More than a full fleet can have on the water; reached only by a bug. */
const ON_WATER_MOST = 4096;

/** One frame on its way to one hearer. */
interface Arrival {
  readonly sentS: number;
  readonly fromIndex: number;
  readonly toIndex: number;
  /** On the water at the hearer, first bit to last. */
  readonly firstBitS: number;
  readonly lastBitS: number;
  /** When the hearer's modem hands it over. */
  readonly heardS: number;
  readonly hex: string;
  fate: FrameFate;
}

export interface ModemState {
  readonly plan: SeaPlan;
  readonly soundMps: number;
  readonly links: LinkState;
  readonly waiting: (string | null)[];
  /** The last two sendings of each vehicle, begin and end: begin, end, begin, end. */
  readonly sendings: Float64Array;
  /** On the water: a few per pair at most, since a sender sends once a round and sound is fast. */
  readonly onWater: Arrival[];
  /** Received and held by the link's delay: as many as are received within the longest one. */
  readonly held: Arrival[];
  readonly counts: { framesSent: number };
  readonly fate: LinkFate;
  readonly scratch: Float64Array;
}

const LONG_AGO_S = -1e12;

export function startModem(plan: SeaPlan, soundMps: number): ModemState {
  const count = plan.vehicles.length;
  return {
    plan,
    soundMps,
    links: startLinks(count * count),
    waiting: new Array<string | null>(count).fill(null),
    sendings: new Float64Array(4 * count).fill(LONG_AGO_S),
    onWater: [],
    held: [],
    counts: { framesSent: 0 },
    fate: { lost: false, garbled: false, delayS: 0, repeatAfterS: -1 },
    scratch: new Float64Array(2),
  };
}

/** The true time of vehicle `index`'s next own slot at or after `timeS`. */
export function nextSlotS(plan: SeaPlan, index: number, timeS: number): number {
  const vehicle: VehiclePlan = plan.vehicles[index]!;
  const roundS = plan.vehicles.length * plan.modem.slotS;
  const ownS = onboardTimeS(vehicle, timeS) - index * plan.modem.slotS;
  const slotOwnS = roundS * Math.ceil((ownS - SLOT_TOLERANCE_S) / roundS) + index * plan.modem.slotS;
  return (slotOwnS - vehicle.clockOffsetS) / (1 + vehicle.clockDriftRatio);
}

/** Sends the frames whose slot begins in the tick that starts at `timeS`, in fleet order. */
export function sendFrames(modem: ModemState, truth: Truth, tick: { draw: Draw; timeS: number }): void {
  const { plan } = modem;
  for (let index = 0; index < plan.vehicles.length; index++) {
    const hex = modem.waiting[index]!;
    if (hex === null) continue;
    const slotS = Math.max(tick.timeS, nextSlotS(plan, index, tick.timeS));
    if (!(slotS < tick.timeS + plan.tickS - SLOT_TOLERANCE_S)) continue;
    modem.waiting[index] = null;
    modem.counts.framesSent += 1;
    const airS = plan.modem.turnOnS + (4 * hex.length) / plan.modem.bitRateBps;
    modem.sendings.copyWithin(4 * index + 2, 4 * index, 4 * index + 2);
    modem.sendings[4 * index] = slotS;
    modem.sendings[4 * index + 1] = slotS + airS;
    for (const arrival of modem.onWater) {
      if (arrival.toIndex === index) deafenIfSending(modem, arrival);
    }
    for (let hearer = 0; hearer < plan.vehicles.length; hearer++) {
      // Written out: spreading `tick` here costs more than the rest of the tick.
      const sending = { draw: tick.draw, slotS, from: index, to: hearer, hex, airS };
      if (hearer !== index) sendTo(modem, truth, sending);
    }
  }
}

interface Sending {
  readonly draw: Draw;
  readonly slotS: number;
  readonly from: number;
  readonly to: number;
  readonly hex: string;
  readonly airS: number;
}

function sendTo(modem: ModemState, truth: Truth, sending: Sending): void {
  const { plan, fate } = modem;
  const { from, to, draw, slotS } = sending;
  const east = truth.eastM[from]! - truth.eastM[to]!;
  const north = truth.northM[from]! - truth.northM[to]!;
  const down = truth.depthM[from]! - truth.depthM[to]!;
  const travelS = Math.sqrt(east * east + north * north + down * down) / modem.soundMps;
  const pair = from * plan.vehicles.length + to;
  const entity = from * PAIR_KEY + to;
  const count = modem.links.sent[pair]!;
  const { link, lossByFault } = linkAt(plan.faults, { from, to, timeS: slotS }, plan.modem.link);
  nextFate(modem.links, { draw, link, pair, entity, scratch: modem.scratch }, fate);
  const lostAs: FrameFate = lossByFault ? 'dropped-by-fault' : 'lost';
  const lastBitS = slotS + sending.airS + travelS;
  const arrival: Arrival = {
    sentS: slotS,
    fromIndex: from,
    toIndex: to,
    firstBitS: slotS + plan.modem.turnOnS + travelS,
    lastBitS,
    heardS: lastBitS + fate.delayS,
    hex: fate.garbled ? garble(draw, { entity, count }, sending.hex) : sending.hex,
    fate: fate.lost ? lostAs : fate.garbled ? 'garbled' : 'heard',
  };
  markOverlaps(modem, arrival);
  deafenIfSending(modem, arrival);
  modem.onWater.push(arrival);
  if (!fate.lost && fate.repeatAfterS >= 0) {
    modem.onWater.push({ ...arrival, heardS: arrival.heardS + fate.repeatAfterS });
  }
  assert(modem.onWater.length < ON_WATER_MOST, 'frames on the water arrive');
}

/** Whether the link let the frame through, so that something else may still spoil it. */
function isThere(arrival: Arrival): boolean {
  return arrival.fate !== 'lost' && arrival.fate !== 'dropped-by-fault';
}

/** Whether its bits, right or wrong, get to the hearer. */
function reaches(arrival: Arrival): boolean {
  return arrival.fate === 'heard' || arrival.fate === 'garbled';
}

function overlaps(a: Arrival, b: Arrival): boolean {
  return a.firstBitS < b.lastBitS && b.firstBitS < a.lastBitS;
}

function markOverlaps(modem: ModemState, arrival: Arrival): void {
  for (const other of modem.onWater) {
    if (other.toIndex !== arrival.toIndex || other.fromIndex === arrival.fromIndex) continue;
    if (!overlaps(other, arrival)) continue;
    if (isThere(other)) other.fate = 'collided';
    if (isThere(arrival)) arrival.fate = 'collided';
  }
}

/** A modem that sends hears nothing; a frame that has collided stays `collided`. */
function deafenIfSending(modem: ModemState, arrival: Arrival): void {
  if (!reaches(arrival)) return;
  for (let last = 0; last < 2; last++) {
    const at = 4 * arrival.toIndex + 2 * last;
    const isSending = modem.sendings[at]! < arrival.lastBitS && arrival.firstBitS < modem.sendings[at + 1]!;
    if (isSending) arrival.fate = 'deaf';
  }
}

/** A frame in an agent's hands, and the hearing that stands for it until the agent says what it was. */
export interface Delivery {
  readonly toIndex: number;
  readonly frame: HeardFrame;
  readonly hearing: Hearing;
}

/** Moves what is over by `timeS` from one list to the end of another, in order; what is not stays. */
function moveOver(from: Arrival[], to: Arrival[], isOver: (arrival: Arrival) => boolean): void {
  let kept = 0;
  for (const arrival of from) {
    if (isOver(arrival)) to.push(arrival);
    else from[kept++] = arrival;
  }
  from.length = kept;
}

/** What a tick's end needs of the rest of the sea, and where it puts what ended. */
interface TickEnd {
  readonly deliveries: Delivery[];
  readonly hearings: Hearing[];
  readonly isDown: (index: number) => boolean;
}

/**
 * Ends every arrival whose time has come by `timeS`: what reached an agent goes to `deliveries`, in
 * order of time, sender and hearer; what did not becomes a hearing at once.
 */
export function endArrivals(modem: ModemState, timeS: number, into: TickEnd): void {
  if (modem.onWater.length > 0) moveOver(modem.onWater, modem.held, (arrival) => arrival.lastBitS <= timeS);
  if (modem.held.length === 0) return;
  const ended: Arrival[] = [];
  moveOver(modem.held, ended, (arrival) => arrival.heardS <= timeS);
  ended.sort((a, b) => a.heardS - b.heardS || a.fromIndex - b.fromIndex || a.toIndex - b.toIndex);
  const handedOver = new Uint8Array(modem.plan.vehicles.length);
  for (const arrival of ended) {
    if (reaches(arrival) && into.isDown(arrival.toIndex)) arrival.fate = 'deaf';
    if (!reaches(arrival)) into.hearings.push(hearingOf(arrival, null));
    else if (handedOver[arrival.toIndex]! >= HANDED_OVER_MOST) modem.held.push(arrival);
    else {
      handedOver[arrival.toIndex]! += 1;
      into.deliveries.push(deliveryOf(modem.plan.vehicles[arrival.toIndex]!, arrival));
    }
  }
}

function hearingOf(arrival: Arrival, heardS: number | null): Hearing {
  const { sentS, fromIndex, toIndex, hex, fate } = arrival;
  return { sentS, heardS, fromIndex, toIndex, bytes: hex.length / 2, fate };
}

function deliveryOf(hearer: VehiclePlan, arrival: Arrival): Delivery {
  const atS = Math.round(onboardTimeS(hearer, arrival.heardS) * HEARD_STEPS) / HEARD_STEPS + 0;
  return {
    toIndex: arrival.toIndex,
    frame: { at_s: atS, bytes: arrival.hex },
    hearing: hearingOf(arrival, arrival.heardS),
  };
}
