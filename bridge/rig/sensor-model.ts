/** Sensor models, config/sensors/<name>.json: ranges, noise and rates as a data sheet gives them. */
import { z } from "zod";

const axisTriple = {
  bits: z.number().int().min(8).max(24).default(16).describe("Resolution over plus and minus the range."),
};

export const sensorModelSchema = z.strictObject({
  name: z.string().min(1).max(60).describe("In plain words."),
  notes: z.string().max(2000).default("").describe("Where the figures come from."),
  delayMs: z
    .number()
    .min(0)
    .max(1000)
    .default(0)
    .describe("How long after a movement its reading shows it: the delay of the unit's own filter."),
  gyro: z
    .strictObject({
      rangeDegPerS: z.number().positive().describe("Plus and minus this."),
      ...axisTriple,
      noiseDegPerSPerSqrtHz: z.number().min(0).describe("White-noise density."),
      biasDegPerS: z.number().min(0).describe("Largest zero-rate offset the data sheet allows."),
      biasInstabilityDegPerH: z
        .number()
        .positive()
        .optional()
        .describe(
          "Bias instability: where the Allan deviation is least, over 0.664; not judged if left out.",
        ),
    })
    .describe("Gyroscope."),
  accel: z
    .strictObject({
      rangeG: z.number().positive().describe("Plus and minus this."),
      ...axisTriple,
      noiseMicroGPerSqrtHz: z.number().min(0).describe("White-noise density."),
      biasMilliG: z.number().min(0).describe("Largest zero-g offset the data sheet allows."),
    })
    .describe("Accelerometer."),
  mag: z
    .strictObject({
      rangeUT: z.number().positive().describe("Plus and minus this."),
      ...axisTriple,
      noiseUT: z.number().min(0).describe("RMS noise of one reading."),
      rateHz: z.number().positive().optional().describe("Own rate, where slower than the hub's sweeps."),
    })
    .optional()
    .describe("Magnetometer; left out for six-axis sensors."),
});

export type SensorModel = z.infer<typeof sensorModelSchema>;
