/**
 * The path of a note: the arc of a circle from its first fix to its last, `sagM` to the right of the
 * chord at its middle, gone along evenly. A straight line where it does not sag.
 *
 * With c the chord and s the sag: tan(α/2) = 2 s / c for half the angle α of the arc, c = 2 r sin α.
 */
import type { Note } from '../../messages/frame.ts';

/** Points along the path with Gauss-Legendre weights: five are exact to the ninth power. */
export const PATH_POINTS = 5;
export const PATH_SHARES = [
  0.04691007703066802, 0.23076534494715845, 0.5, 0.7692346550528415, 0.9530899229693319,
] as const;
export const PATH_WEIGHTS = [
  0.11846344252809454, 0.23931433524968324, 0.28444444444444444, 0.23931433524968324, 0.11846344252809454,
] as const;

const STRAIGHT_M = 0.01;

/** Writes the points of the path, east and north in turn. */
export function writePath(note: Note, out: Float64Array): void {
  const chordEast = note.endEastM - note.startEastM;
  const chordNorth = note.endNorthM - note.startNorthM;
  const chordM = Math.sqrt(chordEast * chordEast + chordNorth * chordNorth);
  const middleEast = (note.startEastM + note.endEastM) / 2;
  const middleNorth = (note.startNorthM + note.endNorthM) / 2;
  const aheadEast = chordM > 0 ? chordEast / chordM : 0;
  const aheadNorth = chordM > 0 ? chordNorth / chordM : 1;
  const sagM = note.sagM;
  const isStraight = Math.abs(sagM) < STRAIGHT_M;
  const half = isStraight ? 0 : 2 * Math.atan2(2 * sagM, chordM);
  const radiusM = isStraight ? 0 : (chordM * chordM / 4 + sagM * sagM) / (2 * sagM);
  for (let point = 0; point < PATH_POINTS; point++) {
    const share = 2 * PATH_SHARES[point]! - 1;
    const aheadM = isStraight ? (share * chordM) / 2 : radiusM * Math.sin(share * half);
    const rightM = isStraight ? 0 : radiusM * (Math.cos(share * half) - Math.cos(half));
    out[2 * point] = middleEast + aheadM * aheadEast + rightM * aheadNorth;
    out[2 * point + 1] = middleNorth + aheadM * aheadNorth - rightM * aheadEast;
  }
}
