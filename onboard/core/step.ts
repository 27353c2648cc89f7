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
/** Steps a unit to which messages are rounded: finer than anything means, and short to write. */
const TO_1E3 = 1e3;
const TO_1E4 = 1e4;
const TO_1E6 = 1e6;
const TO_1E9 = 1e9;
/**
 * The uncertainty of the current is renewed at one of sixteen places along the loop, and at the own place,
 * every so many ticks: the whole loop in about four minutes, in which it hardly changes.
 */
const SIGMA_PLACES = 16;
const SIGMA_PLACE_TICKS = 16;
const SIGMA_HERE_TICKS = 20;

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
    heading_deg: headingDegFromRad(out.headingRad, TO_1E4),
    speed_mps: rounded(out.speedMps, TO_1E4),
    depth_m: rounded(out.depthM, TO_1E3),
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
  if (sense.tick % SIGMA_PLACE_TICKS === 0) {
    const point = ((sense.tick / SIGMA_PLACE_TICKS) % SIGMA_PLACES) * (MAP_POINTS / SIGMA_PLACES);
    const at = { eastM: table.pointEastM[point]!, northM: table.pointNorthM[point]!, atS: sense.at_s };
    currentAt(estimator, at, there);
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

function rounded(value: number, stepsPerUnit: number): number {
  return Math.round(value * stepsPerUnit) / stepsPerUnit;
}

function estimateOf(state: State): Estimate {
  const { here, meanHere, bias } = state;
  const { position } = state.estimator;
  return {
    east_m: rounded(position.eastM, TO_1E3),
    north_m: rounded(position.northM, TO_1E3),
    varEast_m2: rounded(position.varEastM2, TO_1E4),
    covEastNorth_m2: rounded(position.covEastNorthM2, TO_1E4),
    varNorth_m2: rounded(position.varNorthM2, TO_1E4),
    currentEast_mps: rounded(meanHere[0]!, TO_1E6),
    currentNorth_mps: rounded(meanHere[1]!, TO_1E6),
    varCurrentEast_m2ps2: rounded(here.varEastM2ps2, TO_1E9),
    covCurrentEastNorth_m2ps2: rounded(here.covEastNorthM2ps2, TO_1E9),
    varCurrentNorth_m2ps2: rounded(here.varNorthM2ps2, TO_1E9),
    phase: rounded(state.guidance.at.phase, TO_1E6) % 1,
    compassBias_deg: rounded(degFromRad(bias.compassBiasRad), TO_1E4),
    compassBiasSigma_deg: rounded(degFromRad(bias.compassBiasSigmaRad), TO_1E4),
    logScale: rounded(bias.logScale, TO_1E6),
    logScaleSigma: rounded(bias.logScaleSigma, TO_1E6),
    notesHeld: noteCount(state.estimator.log),
  };
}

/** The uncertainty at a point of the loop, between the places that are renewed. */
function sigmaBetween(sigmaMps: Float64Array, point: number): number {
  const step = MAP_POINTS / SIGMA_PLACES;
  const before = point - (point % step);
  const share = (point - before) / step;
  return (1 - share) * sigmaMps[before]! + share * sigmaMps[(before + step) % MAP_POINTS]!;
}

function mapOf(state: State): MapMessage {
  const { table } = state;
  return {
    east_mps: Array.from(table.currentEastMps, (value) => rounded(value, TO_1E6)),
    north_mps: Array.from(table.currentNorthMps, (value) => rounded(value, TO_1E6)),
    sigma_mps: Array.from(table.sigmaMps, (_value, point) => rounded(sigmaBetween(table.sigmaMps, point), TO_1E6)),
  };
}
