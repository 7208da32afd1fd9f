/**
 * The thresholds of all detectors, config/thresholds.json. Each key: one number, its unit in its name, its reason in the
 * description. A rig file may override any under `flags`.
 */
import { z } from "zod";

export const thresholdsSchema = z.strictObject({
  lowHeadroomShare: z
    .number()
    .min(0)
    .max(1)
    .describe(
      "Caution when less of the gyro or accelerometer range than this is free over the last second: a tenth is what one beat commonly exceeds the one before by (common practice, no source).",
    ),
  fullScaleShare: z
    .number()
    .min(0.5)
    .max(1)
    .describe(
      "A reading at or above this share of the range counts as clipped: the last count of a 16-bit sensor is 0.99997, and some stop a few counts short of it.",
    ),
  fieldOffShare: z
    .number()
    .min(0.01)
    .max(1)
    .describe(
      "The magnetic field is disturbed when it is off by this share of its norm or more, in norm and dip together: twice what calibration and inclination errors of 3° leave, and still below 30° of heading error at a dip of 70°.",
    ),
  alternatingFieldUT: z
    .number()
    .min(0.1)
    .max(1000)
    .describe(
      "A flag when the magnetic field alternates by this amplitude: ten times what noise of 0.4 µT leaves in a window's spectrum, and 6° of heading to and fro at a horizontal field of 18 µT.",
    ),
  duplicateSweepsShare: z
    .number()
    .min(0)
    .max(1)
    .describe(
      "A flag when this share of the last second's sweeps came twice: single repeats harm nothing and are counted, several a second tell of a link that echoes or retries.",
    ),
  lateSweepsShare: z
    .number()
    .min(0)
    .max(1)
    .describe(
      "A flag when this share of the last second's sweeps came after a later one and could not be used: the same measure as for repeats.",
    ),
  clockDriftPpm: z
    .number()
    .min(1)
    .max(100_000)
    .describe(
      "A flag when the hub's clock runs off the computer's by this much: two crystals of 100 ppm each at their worst (common practice, no source), and rates derived from them are then wrong by less than any other error.",
    ),
  lostSamplesShare: z
    .number()
    .min(0)
    .max(1)
    .describe(
      "A flag when this share or more of the readings due in the last second is lost: at 100 Hz every lost sweep is told, and a cabled link normally loses none.",
    ),
  corruptPacketsShare: z
    .number()
    .min(0)
    .max(1)
    .describe(
      "A flag when corrupt packets in the last second reach this share of the sweeps due: the same measure as for lost samples, as each commonly costs one.",
    ),
  readErrorsShare: z
    .number()
    .min(0)
    .max(1)
    .describe(
      "A flag when the hub failed to read a sensor in this share or more of the last second's sweeps: the same measure as for lost samples.",
    ),
  onBoardOffDeg: z
    .number()
    .min(1)
    .max(180)
    .describe(
      "A flag when a sensor's own orientation differs by this much RMS from ours, in inclination or (less its slow mean) heading: 20 ms of delay at a fast beat of 8 rad/s make 6°, a wrong mounting or frame mostly tens.",
    ),
  flippedDeg: z
    .number()
    .min(90)
    .max(180)
    .describe(
      "A sensor is flipped when its mean gravity looks this far away from that of the others: a flip makes 180°, a body twisted along its length hardly 60° (common practice, no source).",
    ),
  mountingChangeDeg: z
    .number()
    .min(5)
    .max(90)
    .describe(
      "A sensor's mounting has changed when its up has turned by this much against the other sensors and stays there: a patch that lets go turns by more, and half of it bends a midline visibly.",
    ),
  reversedLagDeg: z
    .number()
    .min(1)
    .max(90)
    .describe(
      "Two sensors are swapped when the wave runs backwards between neighbours by this lag or more: neighbours lag by 6° where they lag least (sixteen on a carangiform body), and windows of 4 s measure lags to about 1°.",
    ),
  restS: z
    .number()
    .min(1)
    .max(60)
    .describe(
      "A sensor is judged at rest once it has lain still for this long, and again after each such time: sixty averages of 0.05 s tell noise to a tenth, and a bias of 0.01 °/s.",
    ),
  restNoiseFactor: z
    .number()
    .min(1)
    .max(100)
    .describe(
      "A flag when a gyroscope or accelerometer is this many times as noisy at rest as its model: units of one kind differ by less than a half (common practice, no source), and the measurement errs by a tenth.",
    ),
  restGyroBiasShare: z
    .number()
    .min(0.01)
    .max(100)
    .describe(
      "A flag when the rate at rest exceeds this share of the data sheet's offset on all three axes together: what goes beyond it is no offset of a sound unit; the quarter is for temperature.",
    ),
  restGravityShare: z
    .number()
    .min(0.01)
    .max(100)
    .describe(
      "A flag when the force at rest is off local gravity (latitude and height of the site) by this share of the data sheet's offset on all three axes together; the quarter is for scale errors.",
    ),
  restFieldShare: z
    .number()
    .min(0.005)
    .max(1)
    .describe(
      "A flag when the field's norm at rest is off by this share both from the Earth's at the site and from what most sensors read: three times what a good calibration leaves (common practice, no source).",
    ),
  trendAheadDays: z
    .number()
    .min(1)
    .max(365)
    .describe(
      "`bendwatch history` says that a figure will leave its limit when its trend gets there within this time, and never looks further ahead than the trials reach back: four weeks are time to order a sensor and to calibrate it (common practice, no source).",
    ),
  supplyLeastV: z
    .number()
    .min(0)
    .max(100)
    .describe(
      "A flag when the hub's supply is below this: the least a USB port of full power may give (USB 2.0, 7.2.2, from memory). Another supply has another limit: give it in the rig file.",
    ),
  temperatureLeastC: z
    .number()
    .min(-100)
    .max(100)
    .describe("A flag when the hub is colder than this: water freezes in housing and plugs."),
  temperatureMostC: z
    .number()
    .min(-100)
    .max(150)
    .describe(
      "A flag when the hub is hotter than this: in water it should never be, and batteries and glue suffer from 60 °C on (common practice, no source).",
    ),
  diskLeastMinutes: z
    .number()
    .min(0)
    .max(100_000)
    .describe(
      "A flag when the disk has room for less than so many minutes at the pace of the recording: longer than a trial, so that there is time to clear up.",
    ),
  stuckAxisS: z
    .number()
    .min(0.1)
    .max(10)
    .describe(
      "An axis is stuck when it repeats one value for this long although it should move: 30 readings at 100 Hz, which noise of one count repeats once in more than 10¹³ tries.",
    ),
});

export type Thresholds = z.infer<typeof thresholdsSchema>;
