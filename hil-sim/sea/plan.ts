/**
 * What the sea is told of a trial: SI numbers, radians, every default filled in. The trial's loader
 * makes it; the sea knows no file, no schema and nothing of missions beyond the keep-in circle.
 */

export interface SeaPlan {
  readonly seed: number;
  readonly tickS: number;
  readonly vehicles: readonly VehiclePlan[];
  readonly currents: readonly CurrentPlan[];
  readonly modem: ModemPlan;
  /** In the order of the script: of two at once on one quantity the later wins. */
  readonly faults: readonly FaultPlan[];
  readonly orders: readonly OrderPlan[];
  readonly water: { readonly temperatureDegC: number; readonly salinityPsu: number; readonly depthM: number };
}

export interface VehiclePlan {
  readonly name: string;
  readonly startEastM: number;
  readonly startNorthM: number;
  readonly startDepthM: number;
  readonly startHeadingRad: number;
  readonly cruiseMps: number;
  readonly speedMinMps: number;
  readonly speedMaxMps: number;
  readonly speedLagS: number;
  readonly turnRateRadps: number;
  readonly climbMps: number;
  readonly batteryJ: number;
  readonly powerHotelW: number;
  readonly powerCruiseW: number;
  readonly clockOffsetS: number;
  /** Seconds gained per second. */
  readonly clockDriftRatio: number;
  readonly fixFrom: 'baseline' | 'surface';
  readonly fixEveryS: number;
  readonly fixSigmaM: number;
  readonly fixLatencyS: number;
  readonly fixOutlierShare: number;
  readonly fixOutlierSigmaM: number;
  readonly compassBiasSigmaRad: number;
  /** Fixes the bias in place of a draw. */
  readonly compassBiasRad: number | null;
  readonly compassSigmaRad: number;
  readonly logScaleSigma: number;
  readonly logScale: number | null;
  readonly logSigmaMps: number;
}

export type CurrentPlan =
  | { readonly kind: 'uniform'; readonly setRad: number; readonly driftMps: number }
  | {
      readonly kind: 'tide'; readonly periodS: number; readonly majorMps: number; readonly minorMps: number;
      readonly bearingRad: number; readonly phaseRad: number;
    }
  | {
      readonly kind: 'eddy'; readonly centreEastM: number; readonly centreNorthM: number;
      readonly radiusM: number; readonly peakMps: number; readonly turn: 'clockwise' | 'anticlockwise';
      readonly movingSetRad: number; readonly movingDriftMps: number;
    }
  | { readonly kind: 'shear'; readonly bearingRad: number; readonly gradientPerS: number };

export interface ModemPlan {
  readonly frameBytes: number;
  readonly bitRateBps: number;
  readonly slotS: number;
  readonly turnOnS: number;
  readonly guardS: number;
  readonly link: LinkPlan;
}

/** Upsets of one directed link, on top of the channel's physics. */
export interface LinkPlan {
  /** Long-run share of frames lost. */
  readonly loss: number;
  /** Mean run of lost frames, 1 for independent losses. */
  readonly burst: number;
  readonly delayS: number;
  readonly jitterS: number;
  readonly repeat: number;
  readonly garble: number;
}

/** When a fault holds: from `atS`, inclusive, to `untilS`, exclusive; infinite to the end. */
interface Span {
  readonly atS: number;
  readonly untilS: number;
}

/** Vehicles by their place in the fleet. */
type Vehicles = readonly number[];

export type FaultPlan = Span & (
  | { readonly kind: 'link'; readonly from: Vehicles; readonly to: Vehicles; readonly change: Partial<LinkPlan> }
  | {
      readonly kind: 'compass'; readonly vehicles: Vehicles; readonly how: 'step' | 'bias' | 'drift';
      /** Radians; for `drift`, radians per second. */
      readonly amount: number;
    }
  | { readonly kind: 'log'; readonly vehicles: Vehicles; readonly how: 'step' | 'scale'; readonly amount: number }
  | { readonly kind: 'fix'; readonly vehicles: Vehicles; readonly upset: FixUpset }
  | { readonly kind: 'reboot'; readonly vehicles: Vehicles; readonly memory: 'lost' | 'kept' }
  | { readonly kind: 'current'; readonly current: CurrentPlan }
);

export type FixUpset =
  | { readonly how: 'outage' }
  | { readonly how: 'jump'; readonly eastM: number; readonly northM: number }
  | { readonly how: 'outliers'; readonly share: number; readonly sigmaM: number };

export interface OrderPlan {
  readonly atS: number;
  readonly vehicles: Vehicles;
  readonly order: 'hold' | 'home' | 'surface' | 'resume';
}
