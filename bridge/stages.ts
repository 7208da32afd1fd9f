/**
 * The stages of a rig: each is made here from what the rig file says of it, and joined to the others in pipeline.ts.
 */
import { HeadMotion } from "./body/head-motion.ts";
import { Midline } from "./body/midline.ts";
import { mountingMatrix } from "./calibration/calibration.ts";
import { DriveComparison } from "./drive/drive-comparison.ts";
import { ChainFusion } from "./fusion/chain-fusion.ts";
import { DEFAULT_PARAMETERS } from "./fusion/parameters.ts";
import type { FlagBook } from "./health/flag-book.ts";
import { Health } from "./health/health.ts";
import { siteField } from "./health/site-field.ts";
import { normalGravity } from "./numeric/gravity.ts";
import { RAD_PER_DEG } from "./numeric/units.ts";
import type { Rig } from "./rig/load.ts";
import type { SensorPlace } from "./rig/rig.ts";
import { TrialRing } from "./trial/ring.ts";
import { GaitMeter, type GaitOptions } from "./wave/gait.ts";
import { kinematicViscosityOf } from "./wave/water.ts";

/** Points of the midline, nose and tail tip included. */
export const POINT_COUNT = 41;
/** The ring buffer's span. */
const RING_SECONDS = 600;

export const stationsOf = ({ sensors }: Rig) => sensors.map(({ station }) => station);
const lengthOf = ({ body }: Rig) => body.lengthMm / 1000;

/** @param startedAt day of the trial, for the World Magnetic Model */
export function healthOf(rig: Rig, startedAt: Date, book: FlagBook): Health {
  const { sensors, models, site } = rig;
  return new Health({
    sensors: sensors.map((sensor, i) => ({ ...sensor, model: models[i]! })),
    rateHz: rig.hub.rateHz,
    lengthM: lengthOf(rig),
    thresholds: rig.thresholds,
    gravityMPerS2: site ? normalGravity(site.latitudeDeg, site.heightM) : null,
    expectedField: site ? siteField(site, site.date ? new Date(site.date) : startedAt) : null,
    book,
  });
}

export function fusionOf(rig: Rig): ChainFusion {
  const { sensors, models } = rig;
  const { rateHz } = rig.hub;
  return new ChainFusion({
    sensorCount: sensors.length,
    rateHz,
    heading: rig.heading,
    body: {
      stations: stationsOf(rig),
      lengthM: lengthOf(rig),
      meanBend: rig.midline.meanBendDeg * RAD_PER_DEG,
    },
    samplingOffsetsS: sensors.map((sensor, i) => turnEndS(sensor, models[i].delayMs, rateHz)),
    sensorRatesHz: sensors.map((sensor) => sensor.rateHz),
    gyroRanges: models.map((model) => model.gyro.rangeDegPerS * RAD_PER_DEG),
    gyroAxes: sensors.map((sensor) => mountingMatrix(sensor.mounting).flat()),
  });
}

export function midlineOf(rig: Rig): Midline {
  const { interpolation } = rig.midline;
  return new Midline({
    lengthM: lengthOf(rig),
    stations: stationsOf(rig),
    pointCount: POINT_COUNT,
    interpolation,
  });
}

/** null where the rig file has the nose fixed. */
export function headMotionOf(rig: Rig): HeadMotion | null {
  if (rig.midline.nose === "fixed") return null;
  return new HeadMotion({
    stations: stationsOf(rig),
    lengthM: lengthOf(rig),
    pointCount: POINT_COUNT,
    delayS: meanDelayS(rig.sensors, rig.models),
    levelTauS: DEFAULT_PARAMETERS.accelTauS,
  });
}

export function gaitOf(rig: Rig, told: Pick<GaitOptions, "onCycle" | "onBout">): GaitMeter {
  const { spreadCycles, steadyFrequencyShare, steadyAmplitudeShare, steadyCycles } = rig.gait;
  return new GaitMeter({
    rateHz: rig.hub.rateHz,
    lengthM: lengthOf(rig),
    pointCount: POINT_COUNT,
    stations: stationsOf(rig),
    flowMPerS: rig.water.flowMPerS ?? Number.NaN,
    viscosityM2PerS: viscosityOf(rig),
    spreadCycles,
    steady: {
      frequencyShare: steadyFrequencyShare,
      amplitudeShare: steadyAmplitudeShare,
      cycles: steadyCycles,
    },
    ...told,
  });
}

/** null where the rig file names no drive. */
export function driveOf(
  rig: Rig,
  onReference: (timeS: number, yaw: number, sway: number) => void,
): DriveComparison | null {
  if (rig.reference === undefined) return null;
  const { rateHz } = rig.hub;
  return new DriveComparison({ reference: rig.reference, stations: stationsOf(rig), rateHz, onReference });
}

export function ringOf(rig: Rig): TrialRing {
  const sensorCount = rig.sensors.length;
  return new TrialRing({
    sensorCount,
    pointCount: POINT_COUNT,
    rateHz: rig.hub.rateHz,
    seconds: RING_SECONDS,
  });
}

/** Of the rig's water, m²/s; NaN where its temperature is not given. */
function viscosityOf({ water }: Rig): number {
  if (water.temperatureC === undefined) return Number.NaN;
  const salinity = water.kind === "sea" ? water.salinityGPerKg : 0;
  return kinematicViscosityOf(water.temperatureC, salinity);
}

/** How long before its sweep's tick a reading's moment is, s, on average over the sensors. */
function meanDelayS(sensors: readonly SensorPlace[], models: Rig["models"]): number {
  const delays = sensors.map(({ samplingOffsetUs }, i) => models[i].delayMs / 1000 - samplingOffsetUs / 1e6);
  return delays.reduce((sum, delay) => sum + delay, 0) / delays.length;
}

/**
 * How much later than its sweep's tick the turn ends that a reading stands for, s. A reading tells the rate at a moment,
 * the turn made of it reaches half an interval to either side: without this the orientation would lead by that half.
 */
function turnEndS({ samplingOffsetUs, rateHz }: SensorPlace, delayMs: number, hubRateHz: number): number {
  return samplingOffsetUs / 1e6 - delayMs / 1000 + 0.5 / (rateHz ?? hubRateHz);
}
