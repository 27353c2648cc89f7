/**
 * Sound speed in sea water, Mackenzie 1981 (JASA 70(3) 807-812, doi 10.1121/1.386920).
 * Valid for 2 to 30 degC, 25 to 40 salinity, 0 to 8000 m; smooth beyond, so that odd waters still run.
 */

/** Sound speed in m/s from temperature (degC), salinity and depth (m). */
export function soundSpeedMps(temperatureDegC: number, salinityPsu: number, depthM: number): number {
  const t = temperatureDegC;
  const s = salinityPsu - 35;
  const d = depthM;
  return 1448.96 + 4.591 * t - 5.304e-2 * t * t + 2.374e-4 * t * t * t + 1.34 * s
    + 1.63e-2 * d + 1.675e-7 * d * d - 1.025e-2 * t * s - 7.139e-13 * t * d * d * d;
}
