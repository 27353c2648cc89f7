/**
 * What each peer last said of itself, and where it must be by now. A peer's phase is predicted through
 * silence with the speed along the loop that the fleet keeps; after a long silence it no longer counts.
 */
import { AGENT_STATES, type AgentState, type Frame } from '../../messages/frame.ts';
import { wrapTurns } from './angle.ts';

const NEVER = -1e9;
const TIME_MODULUS_S = 4096;

export interface Peers {
  readonly selfIndex: number;
  readonly count: number;
  /** The frame's own time, unwrapped; −1e9 if the peer was never heard. */
  readonly atS: Float64Array;
  readonly phase: Float64Array;
  readonly eastM: Float64Array;
  readonly northM: Float64Array;
  readonly stateIndex: Uint8Array;
  /** Counts the frames that told something new. */
  news: number;
}

export function startPeers(selfIndex: number, count: number): Peers {
  return {
    selfIndex,
    count,
    atS: new Float64Array(count).fill(NEVER),
    phase: new Float64Array(count),
    eastM: new Float64Array(count),
    northM: new Float64Array(count),
    stateIndex: new Uint8Array(count),
    news: 0,
  };
}

/** Takes in a peer's frame; an older one than the last changes nothing, so order does not matter. */
export function takeFrame(peers: Peers, frame: Frame, heardAtS: number): void {
  const turns = Math.round((heardAtS - frame.timeMod4096S) / TIME_MODULUS_S);
  const atS = frame.timeMod4096S + TIME_MODULUS_S * turns;
  const peer = frame.senderIndex;
  if (peer === peers.selfIndex || !(atS > peers.atS[peer]!)) return;
  peers.atS[peer] = atS;
  peers.phase[peer] = frame.phase;
  peers.eastM[peer] = frame.eastM;
  peers.northM[peer] = frame.northM;
  peers.stateIndex[peer] = frame.stateIndex;
  peers.news += 1;
}

/** Whether a peer was heard within the last `silenceS`. */
export function isHeard(peers: Peers, peer: number, now: { atS: number; silenceS: number }): boolean {
  return now.atS - peers.atS[peer]! <= now.silenceS;
}

export function peerState(peers: Peers, peer: number): AgentState {
  return AGENT_STATES[peers.stateIndex[peer]!]!;
}

/** The phase of a peer at `atS`, moving on at `turnsPerS` since its frame. */
export function peerPhase(peers: Peers, peer: number, atS: number, turnsPerS: number): number {
  return wrapTurns(peers.phase[peer]! + turnsPerS * (atS - peers.atS[peer]!));
}
