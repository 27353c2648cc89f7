/**
 * Degrees to radians and back: the one conversion, made once on the way in and once on the way out.
 * Headings and sets are degrees true, clockwise from north, in files and messages.
 */

const RAD_PER_DEG = Math.PI / 180;

/** Any angle in degrees to the same angle in radians; nothing is wrapped. */
export function radFromDeg(angleDeg: number): number {
  return angleDeg * RAD_PER_DEG;
}

/** Any angle in radians to the same angle in degrees; nothing is wrapped. */
export function degFromRad(angleRad: number): number {
  return angleRad / RAD_PER_DEG;
}

/** A heading in radians, any turn, to degrees true in [0, 360), rounded to `stepsPerDeg` if given. */
export function headingDegFromRad(headingRad: number, stepsPerDeg = 0): number {
  const turned = degFromRad(headingRad) % 360;
  const positive = turned < 0 ? turned + 360 : turned;
  const stepped = stepsPerDeg > 0 ? Math.round(positive * stepsPerDeg) / stepsPerDeg : positive;
  return stepped >= 360 ? 0 : stepped + 0;
}
