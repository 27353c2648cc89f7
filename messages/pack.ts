/**
 * The packed binary form of sense and steer, from which a run's digest is made.
 *
 * Little-endian; numbers are 64-bit floats, counts and ticks unsigned 32-bit, members of closed lists
 * one byte (their place in the list), text its length as 32 bits and its bytes (ASCII), absent things
 * a zero byte, present ones a one byte and their fields, lists their count and their items. Fields stand
 * in the order in which the code below writes them. −0 is written as 0: JSON cannot say it.
 */
import { assert } from './assert.ts';
import { AGENT_STATES } from './frame.ts';
import { ORDERS, type Sense } from './sense.ts';
import { HEARD_FATES, REASONS, type Steer } from './steer.ts';

/** Longer than any message within the schemas' bounds: 64 frames of 256 bytes in hex, and the rest. */
const BYTES_MAX = 64 * 1024;

export interface Packer {
  readonly bytes: Uint8Array;
  readonly view: DataView;
  length: number;
}

export function startPacker(): Packer {
  const bytes = new Uint8Array(BYTES_MAX);
  return { bytes, view: new DataView(bytes.buffer), length: 0 };
}

function putNumber(packer: Packer, value: number): void {
  assert(value === value, 'a packed number is not NaN');
  packer.view.setFloat64(packer.length, value + 0, true);
  packer.length += 8;
}

function putCount(packer: Packer, value: number): void {
  packer.view.setUint32(packer.length, value, true);
  packer.length += 4;
}

function putByte(packer: Packer, value: number): void {
  assert(value >= 0 && value < 256, 'a packed word is of its list');
  packer.bytes[packer.length] = value;
  packer.length += 1;
}

function putText(packer: Packer, text: string): void {
  putCount(packer, text.length);
  for (let index = 0; index < text.length; index++) packer.bytes[packer.length + index] = text.charCodeAt(index);
  packer.length += text.length;
}

function putNumbers(packer: Packer, values: readonly number[]): void {
  putCount(packer, values.length);
  for (let index = 0; index < values.length; index++) putNumber(packer, values[index]!);
}

/** Packs a sense into the packer from its start; the result is `packer.bytes[0, packer.length)`. */
export function packSense(packer: Packer, sense: Sense): void {
  packer.length = 0;
  putCount(packer, sense.tick);
  putNumber(packer, sense.at_s);
  putNumber(packer, sense.heading_deg);
  putNumber(packer, sense.speed_mps);
  putNumber(packer, sense.depth_m);
  putNumber(packer, sense.battery);
  const { fix } = sense;
  putByte(packer, fix === null ? 0 : 1);
  if (fix !== null) {
    putNumber(packer, fix.at_s);
    putNumber(packer, fix.east_m);
    putNumber(packer, fix.north_m);
    putNumber(packer, fix.sigma_m);
  }
  putCount(packer, sense.heard.length);
  for (const heard of sense.heard) {
    putNumber(packer, heard.at_s);
    putText(packer, heard.bytes);
  }
  putCount(packer, sense.orders.length);
  for (const order of sense.orders) putByte(packer, ORDERS.indexOf(order));
}

/** Packs a steer into the packer from its start. */
export function packSteer(packer: Packer, steer: Steer): void {
  packer.length = 0;
  putCount(packer, steer.tick);
  putNumber(packer, steer.heading_deg);
  putNumber(packer, steer.speed_mps);
  putNumber(packer, steer.depth_m);
  putByte(packer, steer.say === null ? 0 : 1);
  if (steer.say !== null) putText(packer, steer.say);
  putByte(packer, AGENT_STATES.indexOf(steer.state));
  putCount(packer, steer.reasons.length);
  for (const reason of steer.reasons) putByte(packer, REASONS.indexOf(reason));
  putCount(packer, steer.heard.length);
  for (const fate of steer.heard) putByte(packer, HEARD_FATES.indexOf(fate));
  packEstimate(packer, steer.estimate);
  putByte(packer, steer.map === null ? 0 : 1);
  if (steer.map !== null) {
    putNumbers(packer, steer.map.east_mps);
    putNumbers(packer, steer.map.north_mps);
    putNumbers(packer, steer.map.sigma_mps);
  }
}

function packEstimate(packer: Packer, estimate: Steer['estimate']): void {
  putNumber(packer, estimate.east_m);
  putNumber(packer, estimate.north_m);
  putNumber(packer, estimate.varEast_m2);
  putNumber(packer, estimate.covEastNorth_m2);
  putNumber(packer, estimate.varNorth_m2);
  putNumber(packer, estimate.currentEast_mps);
  putNumber(packer, estimate.currentNorth_mps);
  putNumber(packer, estimate.varCurrentEast_m2ps2);
  putNumber(packer, estimate.covCurrentEastNorth_m2ps2);
  putNumber(packer, estimate.varCurrentNorth_m2ps2);
  putNumber(packer, estimate.phase);
  putNumber(packer, estimate.compassBias_deg);
  putNumber(packer, estimate.compassBiasSigma_deg);
  putNumber(packer, estimate.logScale);
  putNumber(packer, estimate.logScaleSigma);
  putCount(packer, estimate.notesHeld);
}
