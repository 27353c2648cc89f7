/** Wrapping of angles (radians) and of places on the loop (turns). Nothing else in the core may wrap. */

const TURN_RAD = 2 * Math.PI;

/** An angle to [−π, π). */
export function wrapRad(angleRad: number): number {
  const turned = (angleRad + Math.PI) % TURN_RAD;
  return (turned < 0 ? turned + TURN_RAD : turned) - Math.PI;
}

/** A place on the loop to [0, 1). */
export function wrapTurns(turns: number): number {
  const part = turns - Math.floor(turns);
  return part >= 1 ? 0 : part;
}

/** A difference of places to [−½, ½). */
export function wrapHalf(turns: number): number {
  return wrapTurns(turns + 0.5) - 0.5;
}
