/**
 * The rig file: body, sensors and where they sit, hub, site, heading, midline. One JSON file in config/rigs (or
 * anywhere). Keys carry their unit where it is not SI. Unknown keys are errors.
 */
import { z } from "zod";
import { thresholdsSchema } from "./thresholds.ts";

const vector3 = z.tuple([z.number(), z.number(), z.number()]);
const matrix3 = z.tuple([vector3, vector3, vector3]);

const mountingSchema = z
  .strictObject({
    yawDeg: z.number().min(-180).max(180).default(0),
    pitchDeg: z.number().min(-180).max(180).default(0),
    rollDeg: z.number().min(-180).max(180).default(0),
  })
  .describe(
    "Rotation that carries body axes (x nose, y left, z up) onto the sensor's own axes: first yaw about z, then pitch about the new y, then roll about the new x.",
  );

const calibrationSchema = z
  .strictObject({
    gyroBiasDegPerS: vector3.default([0, 0, 0]).describe("Subtracted from the raw angular rate."),
    accelBiasMPerS2: vector3
      .default([0, 0, 0])
      .describe("Subtracted from the raw specific force, before the scale."),
    accelScale: vector3.default([1, 1, 1]).describe("Multiplies the specific force, per axis."),
    magHardIronUT: vector3.default([0, 0, 0]).describe("Subtracted from the raw field."),
    magSoftIron: matrix3
      .default([
        [1, 0, 0],
        [0, 1, 0],
        [0, 0, 1],
      ])
      .describe("Multiplies the field after the hard iron is taken off."),
  })
  .describe("In sensor axes.");

export const sensorSchema = z.strictObject({
  name: z.string().min(1).max(24).describe("Short name shown on the ruler."),
  station: z.number().min(0).max(1).describe("Place along the body: 0 nose, 1 tail tip."),
  model: z.string().min(1).describe("Sensor model: a file in config/sensors, without .json."),
  serial: z.string().max(64).default("").describe("Serial number, as on the sensor."),
  samplingOffsetUs: z
    .number()
    .min(-1e6)
    .max(1e6)
    .default(0)
    .describe("How long after the hub's tick this sensor is sampled."),
  rateHz: z
    .number()
    .positive()
    .optional()
    .describe("Own rate, where this sensor gives a reading less often than the hub sweeps."),
  mounting: mountingSchema.prefault({}),
  calibration: calibrationSchema.prefault({}),
});

const portSchema = z
  .strictObject({
    path: z.string().min(1).optional().describe("Port by path, e.g. /dev/ttyACM0 or COM5."),
    usbSerialNumber: z.string().min(1).optional().describe("Port by the adapter's USB serial number."),
  })
  .refine((p) => (p.path === undefined) !== (p.usbSerialNumber === undefined), {
    message: "either path or usbSerialNumber",
  });

export const rigSchema = z
  .strictObject({
    name: z.string().min(1).max(60),
    notes: z.string().max(2000).default(""),
    body: z.strictObject({
      kind: z.enum(["animal", "dummy", "foil"]),
      lengthMm: z.number().positive().max(100_000).describe("Nose to tail tip along the midline."),
      widthMm: z.number().positive().max(20_000).optional().describe("Greatest width, for drawing only."),
    }),
    hub: z.strictObject({
      layout: z
        .string()
        .min(1)
        .default("native")
        .describe("Packet layout: native, text, or a file in config/layouts without .json."),
      rateHz: z.number().min(1).max(4000).describe("Nominal sweeps a second."),
      baudRate: z.number().int().min(1200).max(12_000_000).default(921_600),
      port: portSchema.optional(),
    }),
    sensors: z
      .array(sensorSchema)
      .min(2)
      .max(64)
      .describe("Nose to tail, in the order of the hub's packets."),
    site: z
      .strictObject({
        latitudeDeg: z.number().min(-90).max(90),
        longitudeDeg: z.number().min(-180).max(180),
        heightM: z.number().min(-500).max(9000).default(0),
        date: z.iso
          .date()
          .optional()
          .describe("Date for the World Magnetic Model; the trial's own date if left out."),
      })
      .optional(),
    water: z
      .strictObject({
        kind: z.enum(["fresh", "sea"]).default("fresh"),
        temperatureC: z.number().min(-2).max(45).optional(),
        flowMPerS: z.number().min(0).max(30).optional(),
      })
      .prefault({}),
    heading: z
      .enum(["magnetic", "free"])
      .default("magnetic")
      .describe(
        "magnetic: held by the magnetometers. free: gyroscopes only; it drifts, and the screen says so.",
      ),
    midline: z
      .strictObject({
        interpolation: z.enum(["slerp"]).default("slerp"),
      })
      .prefault({}),
    flags: thresholdsSchema
      .partial()
      .prefault({})
      .describe("Thresholds that differ for this rig from config/thresholds.json."),
  })
  .superRefine((rig, ctx) => {
    for (let i = 1; i < rig.sensors.length; i++) {
      const before = rig.sensors[i - 1]!;
      const here = rig.sensors[i]!;
      if (here.station <= before.station) {
        ctx.addIssue({
          code: "custom",
          path: ["sensors", i, "station"],
          input: here.station,
          message: `a station greater than ${before.station} (that of ${before.name}): sensors are listed nose to tail`,
        });
      }
    }
    const seen = new Map<string, number>();
    rig.sensors.forEach((sensor, i) => {
      const first = seen.get(sensor.name);
      if (first !== undefined) {
        ctx.addIssue({
          code: "custom",
          path: ["sensors", i, "name"],
          input: sensor.name,
          message: `a name of its own (sensors[${first}] has it already)`,
        });
      }
      seen.set(sensor.name, i);
    });
  });

export type RigFile = z.infer<typeof rigSchema>;
export type SensorPlace = RigFile["sensors"][number];
