/** What is kept of a trial about each of its sensors: health.json beside the recording, and its figures by name. */
import { z } from "zod";

/** The figures that are followed over trials: words, unit, digits behind the point, whether it may be below zero. */
export const FIGURES = {
  gyroBiasDegPerS: { name: "gyro bias", unit: "°/s", digits: 2, signed: false },
  gyroWanderDegPerH: { name: "gyro bias instability", unit: "°/h", digits: 0, signed: false },
  gyroNoiseDegPerSPerSqrtHz: { name: "gyro noise", unit: "°/s/√Hz", digits: 4, signed: false },
  accelNoiseMicroGPerSqrtHz: { name: "accel noise", unit: "µg/√Hz", digits: 0, signed: false },
  gravityOffMilliG: { name: "gravity off by", unit: "mg", digits: 1, signed: true },
  fieldOffPercent: { name: "field off by", unit: "%", digits: 1, signed: true },
  lostPercent: { name: "readings lost", unit: "%", digits: 2, signed: false },
} as const;

export type FigureKey = keyof typeof FIGURES;
export const FIGURE_KEYS = Object.keys(FIGURES) as FigureKey[];

const known = z.number().nullable();

const restSchema = z.strictObject({
  startS: z.number(),
  stillS: z.number(),
  gyroBiasDegPerS: known,
  gyroNoiseDegPerSPerSqrtHz: known,
  accelNoiseMicroGPerSqrtHz: known,
  gravityMPerS2: known,
  fieldUT: known,
});

const byFigure = z.strictObject(
  Object.fromEntries(FIGURE_KEYS.map((key) => [key, known])) as Record<FigureKey, typeof known>,
);

const sensorHealthSchema = z.strictObject({
  name: z.string(),
  serial: z.string(),
  model: z.string(),
  restS: z.number(),
  /** null: could not be known. */
  figures: byFigure,
  /** What each figure may amount to, up or down; null: nothing is said of it. */
  limits: byFigure,
  gyroHeadroomPercent: known,
  accelHeadroomPercent: known,
  deliveredPercent: known,
  flags: z.record(z.string(), z.number()),
  rests: z.array(restSchema),
});

export const trialHealthSchema = z.strictObject({
  startedAt: z.string(),
  rigName: z.string(),
  durationS: z.number(),
  /** Of the whole rig. */
  flags: z.record(z.string(), z.number()),
  sensors: z.array(sensorHealthSchema),
});

/** One rest period of a sensor; the bias is the sensor's own, as if no calibration had taken any of it off. */
export type Rest = z.infer<typeof restSchema>;
export type SensorHealth = z.infer<typeof sensorHealthSchema>;
export type TrialHealth = z.infer<typeof trialHealthSchema>;
