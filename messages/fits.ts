/**
 * A quick yes for the two messages of every tick. `fitsSense` and `fitsSteer` say yes only to what the
 * zod schemas accept; a no means nothing but that the schema has the word. A test holds them to it.
 * Lockstep reads a dozen messages a tick with cold caches, where a schema's walk costs five times this.
 */
import { AGENT_STATES } from './frame.ts';
import { HEARD_MAX, ORDERS, type Sense } from './sense.ts';
import { HEARD_FATES, MAP_POINTS, REASONS, type Steer } from './steer.ts';

type Fields = Record<string, unknown>;

const HEX = /^(?:[0-9a-f]{2}){1,256}$/;

function isFields(value: unknown, count: number): value is Fields {
  if (typeof value !== 'object' || value === null || Array.isArray(value)) return false;
  let found = 0;
  for (const _key in value) found += 1;
  return found === count;
}

/** A finite number within bounds, both inclusive. */
function isWithin(value: unknown, least: number, most: number): boolean {
  return typeof value === 'number' && value >= least && value <= most;
}

function isTick(value: unknown): boolean {
  return isWithin(value, 0, 10_000_000) && Number.isInteger(value);
}

function isHeading(value: unknown): boolean {
  return isWithin(value, 0, 360) && value !== 360;
}

const isMetres = (value: unknown): boolean => isWithin(value, -1e6, 1e6);
const isSpeed = (value: unknown): boolean => isWithin(value, -50, 50);
const isDepth = (value: unknown): boolean => isWithin(value, -10, 12_000);
const isTime = (value: unknown): boolean => isWithin(value, -1e7, 1e7);
const isHex = (value: unknown): boolean => typeof value === 'string' && HEX.test(value);

function isList(value: unknown, most: number, fits: (item: unknown) => boolean): value is unknown[] {
  if (!Array.isArray(value) || value.length > most) return false;
  for (let index = 0; index < value.length; index++) if (!fits(value[index])) return false;
  return true;
}

const oneOf =
  (words: readonly string[]) =>
  (value: unknown): boolean =>
    words.includes(value as string);
const isOrder = oneOf(ORDERS);
const isFate = oneOf(HEARD_FATES);
const isReason = oneOf(REASONS);
const isState = oneOf(AGENT_STATES);

function isFix(value: unknown): boolean {
  return (
    isFields(value, 4) &&
    isTime(value['at_s']) &&
    isMetres(value['east_m']) &&
    isMetres(value['north_m']) &&
    isWithin(value['sigma_m'], Number.MIN_VALUE, 1e4)
  );
}

function isHeard(value: unknown): boolean {
  return isFields(value, 2) && isTime(value['at_s']) && isHex(value['bytes']);
}

export function fitsSense(value: unknown): value is Sense {
  return (
    isFields(value, 9) &&
    isTick(value['tick']) &&
    isTime(value['at_s']) &&
    isHeading(value['heading_deg']) &&
    isSpeed(value['speed_mps']) &&
    isDepth(value['depth_m']) &&
    isWithin(value['battery'], 0, 1) &&
    (value['fix'] === null || isFix(value['fix'])) &&
    isList(value['heard'], HEARD_MAX, isHeard) &&
    isList(value['orders'], 8, isOrder)
  );
}

const VARIANCES = ['varEast_m2', 'varNorth_m2', 'varCurrentEast_m2ps2', 'varCurrentNorth_m2ps2'];
const COVARIANCES = ['covEastNorth_m2', 'covCurrentEastNorth_m2ps2'];

function isEstimate(value: unknown): boolean {
  if (!isFields(value, 16)) return false;
  for (const name of VARIANCES) if (!isWithin(value[name], 0, 1e12)) return false;
  for (const name of COVARIANCES) if (!isWithin(value[name], -1e12, 1e12)) return false;
  return (
    isMetres(value['east_m']) &&
    isMetres(value['north_m']) &&
    isSpeed(value['currentEast_mps']) &&
    isSpeed(value['currentNorth_mps']) &&
    isWithin(value['phase'], 0, 1) &&
    value['phase'] !== 1 &&
    isWithin(value['compassBias_deg'], -180, 180) &&
    isWithin(value['compassBiasSigma_deg'], 0, 180) &&
    isWithin(value['logScale'], -1, 1) &&
    isWithin(value['logScaleSigma'], 0, 1) &&
    isWithin(value['notesHeld'], 0, 100_000) &&
    Number.isInteger(value['notesHeld'])
  );
}

function isColumn(value: unknown): boolean {
  return isList(value, MAP_POINTS, isSpeed) && value.length === MAP_POINTS;
}

function isMap(value: unknown): boolean {
  return (
    isFields(value, 3) &&
    isColumn(value['east_mps']) &&
    isColumn(value['north_mps']) &&
    isColumn(value['sigma_mps'])
  );
}

export function fitsSteer(value: unknown): value is Steer {
  return (
    isFields(value, 10) &&
    isTick(value['tick']) &&
    isHeading(value['heading_deg']) &&
    isSpeed(value['speed_mps']) &&
    isDepth(value['depth_m']) &&
    (value['say'] === null || isHex(value['say'])) &&
    isState(value['state']) &&
    isList(value['reasons'], 8, isReason) &&
    value['reasons'].length > 0 &&
    isList(value['heard'], HEARD_MAX, isFate) &&
    isEstimate(value['estimate']) &&
    (value['map'] === null || isMap(value['map']))
  );
}
