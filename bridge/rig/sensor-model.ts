/** Sensor models, config/sensors/<name>.json: ranges, noise and rates as a data sheet gives them. */
import { z } from "zod";

const axisTriple = {
  bits: z.number().int().min(8).max(24).default(16).describe("Resolution over plus and minus the range."),
};

export const sensorModelSchema = z.strictObject({
  name: z.string().min(1).max(60),
  notes: z.string().max(2000).default(""),
  gyro: z.strictObject({
    rangeDegPerS: z.number().positive(),
    ...axisTriple,
    noiseDegPerSPerSqrtHz: z.number().min(0).describe("White-noise density."),
    biasDegPerS: z.number().min(0).describe("Largest zero-rate offset the data sheet allows."),
  }),
  accel: z.strictObject({
    rangeG: z.number().positive(),
    ...axisTriple,
    noiseMicroGPerSqrtHz: z.number().min(0),
    biasMilliG: z.number().min(0),
  }),
  mag: z
    .strictObject({
      rangeUT: z.number().positive(),
      ...axisTriple,
      noiseUT: z.number().min(0).describe("RMS noise of one reading."),
      rateHz: z.number().positive().optional().describe("Own rate, where slower than the hub's sweeps."),
    })
    .optional()
    .describe("Left out for six-axis sensors."),
});

export type SensorModel = z.infer<typeof sensorModelSchema>;
