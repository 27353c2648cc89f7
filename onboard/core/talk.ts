/**
 * What to make of frames heard, and what to say in the own slot.
 *
 * A round is N slots of `slotS`; slot k is that of the k-th vehicle; round 0 begins at onboard time 0.
 * A frame is made in the last tick before its slot, so that its position is at most a tick old.
 * A frame is used once: the same sender, sequence and time again is a repeat, whatever it holds.
 */
import { decodeFrame, bytesFromHex, type Frame } from '../../messages/frame.ts';
import type { Mission } from '../../messages/mission.ts';
import type { HeardFrame } from '../../messages/sense.ts';
import type { HeardFate } from '../../messages/steer.ts';

const SEQUENCES = 256;
const TIME_MODULUS_S = 4096;
/** A frame from further ahead than a bad clock explains, or older than this, is not believed. */
const AHEAD_MAX_S = 60;
const AGE_MAX_S = 1800;
const NEVER = -1e9;

export interface Talk {
  readonly selfIndex: number;
  readonly fleetSize: number;
  readonly slotStartS: number;
  readonly roundS: number;
  /** Counts own frames, modulo 256. */
  readonly sequence: Uint8Array;
  /** Time of the last frame used with each sequence number, sender-major. */
  readonly usedAtS: Float64Array;
}

export type HeardReading =
  | { readonly fate: 'used'; readonly frame: Frame; readonly frameAtS: number }
  | { readonly fate: Exclude<HeardFate, 'used'> };

export function startTalk(mission: Mission, selfIndex: number): Talk {
  const fleetSize = mission.fleet.length;
  return {
    selfIndex,
    fleetSize,
    slotStartS: mission.fleet[selfIndex]!.slot * mission.modem.slot_s,
    roundS: fleetSize * mission.modem.slot_s,
    sequence: new Uint8Array(1),
    usedAtS: new Float64Array(fleetSize * SEQUENCES).fill(NEVER),
  };
}

/** The time nearest to `nearbyS` that is `timeMod4096S` modulo 4096. */
function unwrapTime(timeMod4096S: number, nearbyS: number): number {
  return timeMod4096S + TIME_MODULUS_S * Math.round((nearbyS - timeMod4096S) / TIME_MODULUS_S);
}

/** Reads one frame heard: a frame to use, once, or the reason why not. */
export function readHeard(talk: Talk, heard: HeardFrame): HeardReading {
  const bytes = bytesFromHex(heard.bytes);
  if (bytes === null) return { fate: 'length' };
  const reading = decodeFrame(bytes);
  if (!reading.ok) return { fate: reading.reason };
  const { frame } = reading;
  if (frame.senderIndex >= talk.fleetSize) return { fate: 'sender' };
  if (frame.note !== null && frame.note.originIndex >= talk.fleetSize) return { fate: 'sender' };
  if (frame.senderIndex === talk.selfIndex) return { fate: 'own' };
  const frameAtS = unwrapTime(frame.timeMod4096S, heard.at_s);
  const ageS = heard.at_s - frameAtS;
  if (!(ageS >= -AHEAD_MAX_S && ageS <= AGE_MAX_S)) return { fate: 'time' };
  const at = frame.senderIndex * SEQUENCES + frame.sequence;
  if (talk.usedAtS[at] === frameAtS) return { fate: 'repeat' };
  talk.usedAtS[at] = frameAtS;
  return { fate: 'used', frame, frameAtS };
}

/** Whether the own slot begins after this tick and not after the next: the tick to make a frame in. */
export function isTimeToSay(talk: Talk, atS: number, tickS: number): boolean {
  const untilSlotS = talk.slotStartS - atS;
  const waitS = untilSlotS - talk.roundS * Math.floor(untilSlotS / talk.roundS);
  return (waitS === 0 ? talk.roundS : waitS) <= tickS;
}

/** The sequence number of the frame being made; each call counts one frame. */
export function nextSequence(talk: Talk): number {
  const sequence = talk.sequence[0]!;
  talk.sequence[0] = (sequence + 1) % SEQUENCES;
  return sequence;
}

/** A time as a frame says it. */
export function frameTime(atS: number): number {
  const whole = Math.round(atS) % TIME_MODULUS_S;
  return whole < 0 ? whole + TIME_MODULUS_S : whole + 0;
}
