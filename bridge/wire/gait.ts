/**
 * The numbers of a tailbeat cycle, and the words that say why one of them is not to be trusted. Shared by wave/, which
 * computes them, the export and the screen.
 */

/** SI units; angles in rad. What each one means exactly: wave/gait-cycle.ts. */
export const GAIT_NUMBERS = [
  "frequencyHz",
  "tailAmplitudeM",
  "headAmplitudeM",
  "phaseLag",
  "wavelengthM",
  "waveSpeedMPerS",
  "travellingIndex",
  "meanBend",
  "strouhal",
  "slip",
  "reynolds",
] as const;

export type GaitNumber = (typeof GAIT_NUMBERS)[number];
export type GaitNumbers = Record<GaitNumber, number>;

/** Every number of a cycle, all alike. */
export function gaitNumbers(value: number): GaitNumbers {
  return Object.fromEntries(GAIT_NUMBERS.map((name) => [name, value])) as GaitNumbers;
}

/** Why a number is not to be trusted, or not there; bit i is word i of DOUBT_WORDS. */
export const DOUBT = {
  TOO_FEW_SWEEPS: 1,
  SENSOR_LOST: 2,
  BRIDGED: 4,
  CLIPPED: 8,
  SETTLING: 16,
  HEADING_UNAIDED: 32,
  BELOW_NOISE: 64,
  STANDING_WAVE: 128,
  SENSORS_SPARSE: 256,
  NO_FLOW_SPEED: 512,
  NO_WATER_TEMPERATURE: 1024,
} as const;

export const DOUBT_WORDS = [
  "too few sweeps",
  "sensor lost",
  "bridged",
  "clipped",
  "settling",
  "heading drifts",
  "below noise",
  "standing wave",
  "sparse sensors",
  "no flow speed",
  "no temperature",
] as const;

export type DoubtWord = (typeof DOUBT_WORDS)[number];

/** The words of a number's doubts, in the order of DOUBT_WORDS; none when it is good. */
export function doubtWords(doubts: number): DoubtWord[] {
  return DOUBT_WORDS.filter((_word, bit) => (doubts & (1 << bit)) !== 0);
}
