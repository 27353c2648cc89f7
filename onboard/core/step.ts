/**
 * The agent, whole: one sense in, one steer out, in the order of its parts. Heard frames first, then
 * dead reckoning and the fix, then the map's share of work, then what follows from the picture: the
 * current here and along the loop, the way to go, and what to say.
 *
 * Given the same mission and the same senses, the steers are the same to the last bit. Nothing here
 * reads a clock, draws a number, waits, or throws for what the sea may send.
 */
import { degFromRad, headingDegFromRad, radFromDeg } from '../../messages/angles.ts';
import { AGENT_STATES, encodeFrame, hexFromBytes, type Note } from '../../messages/frame.ts';
import type { Aid, AidedSense } from '../../messages/aid.ts';
import type { Sense } from '../../messages/sense.ts';
import type { Estimate, HeardFate, MapMessage, Steer } from '../../messages/steer.ts';
import {
  biasNow,
  currentAt,
  currentMeanAt,
  guessPosition,
  hearOwnNumber,
  isLost,
  reckonTick,
  startLost,
  takeNote,
  workEstimator,
} from './estimator.ts';
import { guide, hearPeer, isBatteryLow } from './guidance.ts';
import { noteCount } from './note-log.ts';
import { guessPlace } from './open-place.ts';
import { chooseNote, hearHaves, ownHaves, ownNumberHeard } from './share-notes.ts';
import { MAP_POINTS, type State } from './state.ts';
import { frameTime, isTimeToSay, nextSequence, readHeard } from './talk.ts';

const MINUTE_S = 60;
/** One point of the loop has its uncertainty renewed every so many ticks, the own place at every so many. */
const SIGMA_POINT_TICKS = 4;
const SIGMA_HERE_TICKS = 15;

/** Answers one sense. Only yardstick runs aid it. */
export function step(state: State, sense: Sense | AidedSense): Steer {
  const aid = 'aid' in sense ? sense.aid : null;
  if (!state.counts.hasBegun) begin(state, sense);
  const heard = hearFrames(state, sense);
  if (aid?.kind === 'central') for (const note of aid.notes) takeNote(state.estimator, note);
  state.counts.issued = reckon(state, sense, aid);
  findItself(state, sense);
  workEstimator(state.estimator);
  const minute = isWholeMinute(state, sense.tick);
  renewPicture(state, sense, minute);
  if (aid?.kind === 'known') useGiven(state, aid);
  steerTheVehicle(state, sense);
  const out = state.guidanceOut;
  return {
    tick: sense.tick,
    heading_deg: headingDegFromRad(out.headingRad),
    speed_mps: out.speedMps,
    depth_m: out.depthM,
    say: isTimeToSay(state.talk, sense.at_s, state.mission.tick_s) ? say(state, sense.at_s) : null,
    state: out.state,
    reasons: out.reasons.slice(),
    heard,
    estimate: estimateOf(state),
    map: minute ? mapOf(state) : null,
  };
}

/** The first sense: one that is not the run's first means a restart with lost memory. */
function begin(state: State, sense: Sense): void {
  state.counts.hasBegun = true;
  if (sense.tick > 0) startLost(state.estimator);
}

function hearFrames(state: State, sense: Sense): HeardFate[] {
  const fates: HeardFate[] = [];
  for (const heard of sense.heard) {
    const reading = readHeard(state.talk, heard);
    fates.push(reading.fate);
    if (reading.fate !== 'used') continue;
    hearPeer(state.guidance, reading.frame, heard.at_s);
    if (state.mission.sharing === 'solo' || 'aid' in sense) continue;
    hearHaves(state.sharing, state.estimator.log, reading);
    hearOwnNumber(state.estimator, ownNumberHeard(state.sharing));
    if (reading.frame.note !== null) takeNote(state.estimator, reading.frame.note);
  }
  return fates;
}

function reckon(state: State, sense: Sense, aid: Aid | null): Note | null {
  const { fix } = sense;
  return reckonTick(state.estimator, {
    atS: sense.at_s,
    headingRad: radFromDeg(sense.heading_deg),
    speedMps: sense.speed_mps,
    fix: fix === null ? null : { atS: fix.at_s, eastM: fix.east_m, northM: fix.north_m, sigmaM: fix.sigma_m },
    given: aid?.kind === 'known' ? { eastMps: aid.east_mps, northMps: aid.north_mps } : null,
    unrounded: aid?.kind === 'central',
  });
}

/** After a start in the middle of a run: the one place of the pattern that nobody holds is likely its own. */
function findItself(state: State, sense: Sense): void {
  const { estimator, guidance, meanPoint } = state;
  if (!isLost(estimator) || !guessPlace(guidance, sense.at_s, meanPoint)) return;
  guessPosition(estimator, meanPoint[0]!, meanPoint[1]!);
}

function isWholeMinute(state: State, tick: number): boolean {
  return (tick * state.mission.tick_s) % MINUTE_S === 0;
}

/** Position, biases, the current here each tick; the current along the loop each minute. */
function renewPicture(state: State, sense: Sense, minute: boolean): void {
  const { estimator, table, meanHere, there } = state;
  const { position } = estimator;
  biasNow(estimator, state.bias);
  const here = { eastM: position.eastM, northM: position.northM, atS: sense.at_s };
  currentMeanAt(estimator, here, meanHere);
  if (sense.tick % SIGMA_POINT_TICKS === 0) {
    const point = (sense.tick / SIGMA_POINT_TICKS) % MAP_POINTS;
    currentAt(
      estimator,
      { eastM: table.pointEastM[point]!, northM: table.pointNorthM[point]!, atS: sense.at_s },
      there,
    );
    table.sigmaMps[point] = Math.sqrt(there.varEastM2ps2 + there.varNorthM2ps2);
  }
  if (sense.tick % SIGMA_HERE_TICKS === 0) {
    currentAt(estimator, here, state.here);
  }
  if (!minute) return;
  const mean = state.meanPoint;
  for (let point = 0; point < MAP_POINTS; point++) {
    const place = { eastM: table.pointEastM[point]!, northM: table.pointNorthM[point]!, atS: sense.at_s };
    currentMeanAt(estimator, place, mean);
    table.currentEastMps[point] = mean[0]!;
    table.currentNorthMps[point] = mean[1]!;
  }
}

/** The picture of the yardstick run in which the true current is given. */
function useGiven(state: State, aid: Extract<Aid, { kind: 'known' }>): void {
  const { meanHere, table } = state;
  meanHere[0] = aid.east_mps;
  meanHere[1] = aid.north_mps;
  if (aid.loop === null) return;
  table.currentEastMps.set(aid.loop.east_mps);
  table.currentNorthMps.set(aid.loop.north_mps);
}

function steerTheVehicle(state: State, sense: Sense): void {
  const { guidanceIn: input, here, bias, mission } = state;
  const { position } = state.estimator;
  input.atS = sense.at_s;
  input.eastM = position.eastM;
  input.northM = position.northM;
  input.depthM = sense.depth_m;
  input.positionSigmaM = Math.sqrt(position.varEastM2 + position.varNorthM2);
  input.compassBiasRad = bias.compassBiasRad;
  input.logScale = bias.logScale;
  input.headingRad = radFromDeg(sense.heading_deg);
  input.speedMps = sense.speed_mps;
  input.battery = sense.battery;
  input.currentEastMps = state.meanHere[0]!;
  input.currentNorthMps = state.meanHere[1]!;
  input.currentSigmaMps = Math.sqrt(here.varEastM2ps2 + here.varNorthM2ps2);
  input.mapStale = !(input.currentSigmaMps <= mission.onboard.mapStale_mps);
  input.orders = sense.orders;
  guide(state.guidance, input, state.guidanceOut);
}

/** The frame for the coming slot, as hex. */
function say(state: State, atS: number): string {
  const { talk, sharing, estimator, guidanceIn, guidanceOut, mission } = state;
  const { position } = estimator;
  const sequence = nextSequence(talk);
  const alone = mission.sharing === 'solo';
  return hexFromBytes(
    encodeFrame({
      senderIndex: state.selfIndex,
      sequence,
      timeMod4096S: frameTime(atS),
      eastM: position.eastM,
      northM: position.northM,
      phase: guidanceOut.phase,
      stateIndex: AGENT_STATES.indexOf(guidanceOut.state),
      positionUncertain: guidanceIn.positionSigmaM > mission.onboard.positionUncertain_m,
      mapStale: guidanceIn.mapStale,
      batteryLow: isBatteryLow(state.guidance),
      note: alone ? null : chooseNote(sharing, estimator.log),
      haves: alone ? [0, 0, 0, 0, 0] : ownHaves(sharing, estimator.log, sequence),
    }),
  );
}

function estimateOf(state: State): Estimate {
  const { here, meanHere, bias } = state;
  const { position } = state.estimator;
  return {
    east_m: position.eastM,
    north_m: position.northM,
    varEast_m2: position.varEastM2,
    covEastNorth_m2: position.covEastNorthM2,
    varNorth_m2: position.varNorthM2,
    currentEast_mps: meanHere[0]!,
    currentNorth_mps: meanHere[1]!,
    varCurrentEast_m2ps2: here.varEastM2ps2,
    covCurrentEastNorth_m2ps2: here.covEastNorthM2ps2,
    varCurrentNorth_m2ps2: here.varNorthM2ps2,
    phase: state.guidance.at.phase,
    compassBias_deg: degFromRad(bias.compassBiasRad),
    compassBiasSigma_deg: degFromRad(bias.compassBiasSigmaRad),
    logScale: bias.logScale,
    logScaleSigma: bias.logScaleSigma,
    notesHeld: noteCount(state.estimator.log),
  };
}

function mapOf(state: State): MapMessage {
  const { table } = state;
  return {
    east_mps: Array.from(table.currentEastMps),
    north_mps: Array.from(table.currentNorthMps),
    sigma_mps: Array.from(table.sigmaMps),
  };
}
