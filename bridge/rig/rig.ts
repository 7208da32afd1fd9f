/**
 * The rig file: body, sensors and where they sit, hub, site, heading, midline. One JSON file in config/rigs (or
 * anywhere). Keys carry their unit where it is not SI. Unknown keys are errors.
 */
import { z } from "zod";
import { checkLimitsSchema } from "./check-limits.ts";
import { thresholdsSchema } from "./thresholds.ts";

const vector3 = z.tuple([z.number(), z.number(), z.number()]);
const matrix3 = z.tuple([vector3, vector3, vector3]);

export const mountingSchema = z
  .strictObject({
    yawDeg: z.number().min(-180).max(180).default(0).describe("About body z; positive turns left."),
    pitchDeg: z
      .number()
      .min(-180)
      .max(180)
      .default(0)
      .describe("About the new y; right-handed, so positive tips the sensor's x axis down."),
    rollDeg: z
      .number()
      .min(-180)
      .max(180)
      .default(0)
      .describe("About the new x; positive puts the right side down."),
  })
  .describe(
    "Rotation that carries body axes (x nose, y left, z up) onto the sensor's own axes: first yaw about z, then pitch about the new y, then roll about the new x.",
  );

export const calibrationSchema = z
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
  records: z
    .union([z.enum(["newest", "none"]), z.array(z.string().regex(/^[\w-][\w.-]*$/))])
    .default("newest")
    .describe(
      "Calibration records of this serial number that take the place of the numbers here: newest of each kind, none, or those listed, without .json.",
    ),
});

const portSchema = z
  .strictObject({
    path: z.string().min(1).optional().describe("Port by path, e.g. /dev/ttyACM0 or COM5."),
    usbSerialNumber: z.string().min(1).optional().describe("Port by the adapter's USB serial number."),
  })
  .refine((p) => (p.path === undefined) !== (p.usbSerialNumber === undefined), {
    message: "either path or usbSerialNumber",
  });

const isNumber = (value: unknown): value is number => typeof value === "number";

/**
 * Stations must increase and names differ. Runs on sensors that failed their own checks too, so that all faults of a file
 * are reported at once: looks only at what has the right type.
 */
function checkPlaces(sensors: readonly Partial<z.infer<typeof sensorSchema>>[], ctx: z.RefinementCtx): void {
  sensors.forEach((sensor, i) => {
    const before = sensors[i - 1];
    if (isNumber(sensor?.station) && isNumber(before?.station) && sensor.station <= before.station) {
      ctx.addIssue({
        code: "custom",
        path: [i, "station"],
        input: sensor.station,
        message: `a station greater than ${before.station} (that of ${before.name}): sensors are listed nose to tail`,
      });
    }
    const first = sensors.findIndex((other) => other?.name === sensor?.name);
    if (first < i && sensor?.name !== undefined) {
      ctx.addIssue({
        code: "custom",
        path: [i, "name"],
        input: sensor.name,
        message: `a name of its own (sensors[${first}] has it already)`,
      });
    }
  });
}

const referenceSchema = z
  .strictObject({
    station: z.number().min(0).max(1).default(0).describe("Place along the body that the drive moves."),
    yawReversed: z.boolean().default(false).describe("The drive counts turns to the right as positive."),
    yawZeroDeg: z
      .number()
      .min(-360)
      .max(360)
      .default(0)
      .describe("The drive's yaw with the body straight ahead; taken off first."),
    swayReversed: z.boolean().default(false).describe("The drive counts sway to the right as positive."),
    swayZeroMm: z
      .number()
      .min(-100_000)
      .max(100_000)
      .default(0)
      .describe("The drive's sway in the middle; taken off first."),
    delayMs: z
      .number()
      .min(-1000)
      .max(1000)
      .default(0)
      .describe("How long before its tick the drive's reading was taken, where that is known."),
  })
  .describe(
    "The drive that moves the body, where the hub sends its yaw and sway: what is measured is compared with it.",
  );

export const rigSchema = z.strictObject({
  name: z.string().min(1).max(60).describe("Shown on screen and in exports."),
  notes: z.string().max(2000).default("").describe("Free text."),
  calibrations: z
    .string()
    .default("")
    .describe("Folder of calibration records; config/calibrations if left empty."),
  body: z
    .strictObject({
      kind: z.enum(["animal", "dummy", "foil"]).describe("What bends."),
      lengthMm: z.number().positive().max(100_000).describe("Nose to tail tip along the midline."),
      widthMm: z.number().positive().max(20_000).optional().describe("Greatest width, for drawing only."),
    })
    .describe("What the sensors sit on."),
  hub: z
    .strictObject({
      layout: z
        .string()
        .min(1)
        .default("native")
        .describe("Packet layout: native, text, or a file in config/layouts without .json."),
      rateHz: z.number().min(1).max(4000).describe("Nominal sweeps a second."),
      baudRate: z
        .number()
        .int()
        .min(1200)
        .max(12_000_000)
        .default(921_600)
        .describe("Of the serial port, bit/s."),
      port: portSchema.optional().describe("Which serial port the hub is on: either key."),
    })
    .describe("What samples all sensors and sends."),
  sensors: z
    .array(sensorSchema)
    .min(1)
    .max(64)
    .superRefine(checkPlaces, { when: ({ value }) => Array.isArray(value) })
    .describe("Nose to tail, in the order of the hub's packets."),
  site: z
    .strictObject({
      latitudeDeg: z.number().min(-90).max(90).describe("North positive."),
      longitudeDeg: z.number().min(-180).max(180).describe("East positive."),
      heightM: z.number().min(-500).max(9000).default(0).describe("Above sea level."),
      date: z.iso
        .date()
        .optional()
        .describe("Date for the World Magnetic Model; the trial's own date if left out."),
    })
    .optional()
    .describe("Where the rig stands, for the Earth's field there."),
  water: z
    .strictObject({
      kind: z.enum(["fresh", "sea"]).default("fresh").describe("For density and viscosity."),
      salinityGPerKg: z
        .number()
        .min(0)
        .max(42)
        .default(35)
        .describe("Dissolved salt; counts in sea water only. 35: the ocean's reference."),
      temperatureC: z.number().min(-2).max(45).optional().describe("Of the water; for the Reynolds number."),
      flowMPerS: z
        .number()
        .min(0)
        .max(30)
        .optional()
        .describe("Speed of the water past the body; for Strouhal number, slip and Reynolds number."),
    })
    .prefault({})
    .describe("What the body swims in."),
  heading: z
    .enum(["magnetic", "relative", "free"])
    .default("magnetic")
    .describe(
      "magnetic: held by the magnetometers; while the field is off along the whole body, as relative. relative: each sensor's against its neighbours' is held by how the body moves, the whole body's drifts; no magnetometer needed. free: gyroscopes only; it drifts, and the screen says so.",
    ),
  midline: z
    .strictObject({
      interpolation: z
        .enum(["wave", "smooth", "slerp"])
        .default("wave")
        .describe(
          "Between sensors along the body, on the sphere. wave: while the body beats, by amplitude and phase of its wave, which takes sensors less than half a wavelength apart; else as smooth. smooth: bend and twist go on through the sensors without a jump, and beyond the ends. slerp: evenly from each to the next, straight beyond the ends.",
        ),
      nose: z
        .enum(["moving", "fixed"])
        .default("moving")
        .describe(
          "moving: sway, heave and surge of the nose about its mean place, at the tailbeat and its harmonics, from the accelerometers; without a beat, or where they contradict the shape, the nose is held still. fixed: always held still.",
        ),
      meanBendDeg: z
        .number()
        .min(-180)
        .max(180)
        .default(0)
        .describe(
          "Bend of the whole body, tail tip to nose, over whole tailbeats; positive with the nose turned left; spread evenly. Relative heading leans on it where the body moves too little to tell.",
        ),
    })
    .prefault({})
    .describe("How the midline is built."),
  gait: z
    .strictObject({
      spreadCycles: z
        .number()
        .int()
        .min(2)
        .max(200)
        .default(10)
        .describe(
          "Cycles that a number's spread is taken over: enough that the spread itself is known to a quarter, few enough to follow a change.",
        ),
      steadyFrequencyShare: z
        .number()
        .min(0.001)
        .max(1)
        .default(0.05)
        .describe(
          "Swimming is steady while each cycle's frequency stays within this share of the bout's mean (common practice, no source),",
        ),
      steadyAmplitudeShare: z
        .number()
        .min(0.001)
        .max(1)
        .default(0.1)
        .describe(
          "and its tail amplitude within this share, which varies more from beat to beat (common practice, no source),",
        ),
      steadyCycles: z
        .number()
        .int()
        .min(2)
        .max(100)
        .default(3)
        .describe("for at least so many cycles: two may agree by chance."),
    })
    .prefault({})
    .describe("How tailbeats are summed up."),
  reference: referenceSchema.optional(),
  flags: thresholdsSchema
    .partial()
    .prefault({})
    .describe("Thresholds that differ for this rig from config/thresholds.json."),
  check: checkLimitsSchema
    .partial()
    .prefault({})
    .describe("Limits of the release check that differ for this rig from config/check.json."),
});

export type RigFile = z.infer<typeof rigSchema>;
/** What holds the headings. */
export type HeadingSource = RigFile["heading"];
export type SensorPlace = RigFile["sensors"][number];
