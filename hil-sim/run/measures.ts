/** Every measure of a run: its name, unit and what it says. `measure.ts` makes them, limits name them. */
import type { Worst } from './tally.ts';

export const MEASURES = {
  formUp_s: { unit: 's', says: 'start of the first span in which the fleet stayed formed up' },
  crossTrackRms: { unit: 'm', says: 'distance from the loop, root mean square' },
  crossTrackMax: { unit: 'm', says: 'distance from the loop, greatest' },
  gapRms: { unit: '', says: 'gap error over target gap, root mean square' },
  separationMin: { unit: 'm', says: 'distance between two vehicles within 5 m of depth, least, whole run' },
  currentRms: { unit: 'm/s', says: 'stated current at the own place against the truth, root mean square' },
  mapRms: { unit: 'm/s', says: 'stated currents round the loop against the truth, root mean square' },
  mapSpread: {
    unit: 'm/s',
    says: "stated currents round the loop against the fleet's mean, root mean square",
  },
  positionRms: { unit: 'm', says: 'stated position against the true one, root mean square' },
  deliveryRatio: { unit: '', says: 'frames heard and used over frames and hearers, whole run' },
  framesSent: { unit: 'frames', says: 'frames said whose fate is known, whole run' },
  energy_Wh: { unit: 'Wh', says: 'energy used by the fleet, whole run' },
  lateTicks: { unit: 'ticks', says: 'steers that stood in for late ones' },
} as const;

export type MeasureName = keyof typeof MEASURES;
export const MEASURE_NAMES = Object.keys(MEASURES) as MeasureName[];

export type MeasureValues = Readonly<Record<MeasureName, number | null>>;
export type WorstPlaces = Readonly<Record<MeasureName, Worst>>;

/** One vehicle's own share of the measures; null where nothing counted. */
export interface VehicleMeasures {
  readonly vehicle: string;
  /** Taken out of the loop measures by `limits.except`. */
  readonly isExcepted: boolean;
  readonly crossTrackRms: number | null;
  readonly crossTrackMax: number | null;
  readonly gapRms: number | null;
  readonly currentRms: number | null;
  readonly mapRms: number | null;
  readonly positionRms: number | null;
  readonly deliveryRatio: number | null;
  readonly framesSent: number;
  readonly energy_Wh: number;
  readonly battery: number;
}
