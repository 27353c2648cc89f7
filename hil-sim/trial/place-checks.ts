/** Relations between areas, the loop, starts, the recovery place, and the currents on the loop. */
import { FRAME_POSITION_MAX_M } from '../../messages/frame.ts';
import { sayQuantity } from '../../messages/units.ts';
import type { Finding } from './finding.ts';
import type { Trial, TrialCurrent } from './schema.ts';
import type { Path } from './tree.ts';
import { fullVehicles, type FullVehicle } from './vehicles.ts';

interface Place {
  readonly east: number;
  readonly north: number;
}

interface Circle {
  readonly centre: Place;
  readonly radius: number;
}

function distance(a: Place, b: Place): number {
  return Math.sqrt((a.east - b.east) ** 2 + (a.north - b.north) ** 2);
}

const sayLength = (lengthM: number): string => sayQuantity(lengthM, 'length');

export function checkPlaces(trial: Trial): Finding[] {
  const { keepIn, keepOut, loop, recovery, depth } = trial.mission;
  const findings: Finding[] = [];
  const place = (path: Path, what: string, at: Place): void => {
    findings.push(...liesIn(path, { what, circle: { centre: at, radius: 0 }, keepIn }));
    findings.push(...misses(path, { what, at, keepOut }));
  };
  findings.push(...liesIn(['mission', 'loop'], { what: 'the loop', circle: loop, keepIn }));
  place(['mission', 'recovery'], 'the recovery place', recovery);
  trial.fleet.vehicles.forEach(({ name, start }, index) => {
    place(['fleet', 'vehicles', index, 'start'], `the start of ${name}`, start);
  });
  keepOut.forEach((area, index) => {
    if (!(Math.abs(distance(area.centre, loop.centre) - loop.radius) >= area.radius)) {
      const path = ['mission', 'keepOut', index];
      findings.push({ path, found: 'covers part of the loop', allowed: 'must leave it clear' });
    }
  });
  const reachM = distance(keepIn.centre, { east: 0, north: 0 }) + keepIn.radius;
  if (!(reachM <= FRAME_POSITION_MAX_M)) {
    findings.push({
      path: ['mission', 'keepIn'],
      found: `reaches ${sayLength(reachM)} from the datum`,
      allowed: `must stay within the ${sayLength(FRAME_POSITION_MAX_M)} that frames can say: `
        + 'move the datum or shrink the area',
    });
  }
  if (!(depth < trial.water.bottom)) {
    const allowed = `must be above the bottom at ${sayLength(trial.water.bottom)}`;
    findings.push({ path: ['mission', 'depth'], found: `is ${sayLength(depth)}`, allowed });
  }
  return findings;
}

function liesIn(path: Path, of: { what: string; circle: Circle; keepIn: Circle }): Finding[] {
  const { what, circle, keepIn } = of;
  const reachM = distance(circle.centre, keepIn.centre) + circle.radius;
  if (reachM <= keepIn.radius) return [];
  const found = `puts ${what} ${sayLength(reachM)} from the centre of keepIn`;
  return [{ path, found, allowed: `must stay within its ${sayLength(keepIn.radius)}` }];
}

function misses(path: Path, of: { what: string; at: Place; keepOut: readonly Circle[] }): Finding[] {
  return of.keepOut.flatMap((area, index) => {
    if (distance(of.at, area.centre) >= area.radius) return [];
    return [{ path, found: `puts ${of.what} inside mission.keepOut.${index}`, allowed: 'must lie outside' }];
  });
}

/** The fastest that a current of this kind flows anywhere within a circle, or a little more. */
function driftMost(current: TrialCurrent, { centre, radius }: Circle): number {
  switch (current.kind) {
    case 'uniform':
      return current.drift;
    case 'tide':
      return Math.max(Math.abs(current.major), Math.abs(current.minor));
    case 'eddy':
      return current.peak;
    case 'shear': {
      const rightM = centre.east * Math.cos(current.bearing) - centre.north * Math.sin(current.bearing);
      return (Math.abs(current.gradient) / current.over) * (Math.abs(rightM) + radius);
    }
  }
}

/**
 * A circle of radius R at speed v in a current up to f needs a turn rate up to (v+f)²/(R·v) (METHODS
 * A20), and headway needs f below the greatest speed. The vehicle that needs most is told.
 */
export function checkLoop(trial: Trial): Finding[] {
  const { loop } = trial.mission;
  const driftMps = trial.water.currents.reduce((sum, current) => sum + driftMost(current, loop), 0);
  const drift = sayQuantity(driftMps, 'speed');
  const vehicles = fullVehicles(trial);
  const radiusM = ({ speed, turnRate }: FullVehicle): number =>
    (speed.cruise + driftMps) ** 2 / (speed.cruise * turnRate);
  const widest = vehicles.reduce((most, one) => (radiusM(one) > radiusM(most) ? one : most));
  const slowest = vehicles.reduce((least, one) => (one.speed.max < least.speed.max ? one : least));
  const findings: Finding[] = [];
  if (!(loop.radius >= radiusM(widest))) {
    findings.push({
      path: ['mission', 'loop', 'radius'],
      found: `is ${sayLength(loop.radius)}, too tight for ${widest.name}`,
      allowed: `must be at least ${sayLength(radiusM(widest))} at `
        + `${sayQuantity(widest.speed.cruise, 'speed')} cruise, ${drift} of current and `
        + `${sayQuantity(widest.turnRate, 'angleRate')} of turn`,
    });
  }
  if (!(driftMps < slowest.speed.max)) {
    findings.push({
      path: ['water', 'currents'],
      found: `may add up to ${drift} on the loop`,
      allowed: `must stay below the ${sayQuantity(slowest.speed.max, 'speed')} that ${slowest.name} can make`,
    });
  }
  return findings;
}
