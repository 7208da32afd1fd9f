/**
 * A magnetic field that alternates: motor or mains. Sampled a hundred times a second it shows at a frequency that need not
 * be its own; the flag names what it could be.
 *
 * The readings are turned into earth axes, in which the Earth's field stands still however the body moves, and searched for
 * a tone window by window, each half over the one before. What is slower than MOTION_HZ cannot be told from a body that
 * moves past iron. Windows with lost or broken readings are passed over.
 */
import { foldedHz, ToneFinder } from "../numeric/tone.ts";
import { CHANNELS, CONDITION, GYRO, HAS_GYRO, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import { Hysteresis } from "./hysteresis.ts";
import { limitsOf } from "./limits.ts";
import type { HealthSetup } from "./setup.ts";
import { Spread } from "./spread.ts";

/** Beats and their overtones lie below (common practice, no source). */
const MOTION_HZ = 8;
const WINDOW_S = 0.64;
/** Wait so long for the other sensors: all windows end within half a window. */
const CONFIRM_S = 0.2;
const QUIET_S = 1;
/** Calm below this share of the threshold. */
const RELEASE = 2 / 3;
/** Times the threshold that heading cannot stand. */
const ALARM_FACTOR = 10;
/** How well a window tells a frequency, Hz; readings need not be even to better. */
const HZ_KNOWN = 0.6;
/** What often alternates near a tank. */
const SOURCES = [
  { hz: 50, name: "mains of 50 Hz" },
  { hz: 60, name: "mains of 60 Hz" },
  { hz: 100, name: "twice mains of 50 Hz" },
  { hz: 120, name: "twice mains of 60 Hz" },
] as const;
const BROKEN =
  CONDITION.STUCK |
  CONDITION.READ_FAILED |
  CONDITION.GYRO_CLIPPED |
  CONDITION.ACCEL_CLIPPED |
  CONDITION.MAG_CLIPPED |
  CONDITION.GAP;

/** One sensor's window. */
interface Track {
  readonly finder: ToneFinder;
  /** Three channels of the last readings, rings, earth axes, µT. */
  readonly readings: Float64Array;
  /** Of the same readings. */
  readonly timeS: Float64Array;
  count: number;
  /** Of the window in which it alternated most. */
  frequencyHz: number;
  rateHz: number;
}

export class AlternatingField {
  readonly #setup: HealthSetup;
  /** null without magnetometer, or with one too slow to tell. */
  readonly #tracks: readonly (Track | null)[];
  readonly #state: Hysteresis;
  readonly #spread: Spread;

  constructor(setup: HealthSetup) {
    this.#setup = setup;
    this.#tracks = setup.sensors.map((sensor) => {
      const rateHz = limitsOf(sensor, setup.rateHz)[2]?.rateHz ?? 0;
      return rateHz > 3 * MOTION_HZ ? newTrack(rateHz) : null;
    });
    const able = this.#tracks.filter((track) => track !== null).length;
    this.#state = new Hysteresis(setup.sensors.length, 0, QUIET_S);
    this.#spread = new Spread(setup, this.#state, able, {
      one: "alternating field",
      several: "alternating field at several sensors",
      rig: "rig-wide alternating field",
      confirmS: CONFIRM_S,
      quietS: QUIET_S,
      detail: (i) => describe(this.#tracks[i]!, this.#state.worst[i]!),
      severity: (i) =>
        this.#state.worst[i]! >= ALARM_FACTOR * setup.thresholds.alternatingFieldUT ? "alarm" : "caution",
      rigSeverity: "caution",
      rigDetail: (count) => {
        const { worst } = this.#state;
        const most = worst.indexOf(Math.max(...worst));
        return `at ${count} of ${able} sensors: ${describe(this.#tracks[most]!, worst[most]!)}`;
      },
    });
  }

  /** Needs this sweep's broken readings marked. @param orientations body axes to earth as of the sweep before */
  observe(sweep: Sweep, orientations: Float64Array): void {
    for (let i = 0; i < sweep.sensorCount; i++) {
      const track = this.#tracks[i]!;
      if (track === null) continue;
      if ((sweep.conditions[i]! & BROKEN) !== 0) track.count = 0;
      else if ((sweep.present[i]! & HAS_MAG) !== 0) this.#take(i, track, sweep, orientations);
      if (this.#state.on[i] === 1) this.#spread.confirm(i, sweep.timeS);
    }
    this.#spread.judgeRig(sweep.timeS);
  }

  #take(i: number, track: Track, sweep: Sweep, orientations: Float64Array): void {
    const { size } = track.finder;
    const place = track.count % size;
    writeEarthField(track.readings, place, size, sweep, i, orientations);
    track.timeS[place] = sweep.timeS;
    track.count++;
    if (track.count < size || track.count % (size / 2) !== 0) return;
    const start = track.count % size;
    const spanS = sweep.timeS - track.timeS[start]!;
    const rateHz = (size - 1) / spanS;
    const { finder } = track;
    const amplitudeUT = finder.find(track.readings, start, MOTION_HZ / rateHz) ? finder.amplitude : 0;
    const limit = this.#setup.thresholds.alternatingFieldUT;
    const calm = amplitudeUT < limit * RELEASE;
    const turn = this.#state.step(i, sweep.timeS, amplitudeUT >= limit, calm, amplitudeUT);
    if (amplitudeUT >= limit && amplitudeUT === this.#state.worst[i]) {
      track.frequencyHz = finder.frequency * rateHz;
      track.rateHz = rateHz;
    }
    this.#spread.turned(i, turn);
  }
}

function newTrack(rateHz: number): Track {
  const size = 2 ** Math.round(Math.log2(WINDOW_S * rateHz));
  return {
    finder: new ToneFinder(size),
    readings: new Float64Array(3 * size),
    timeS: new Float64Array(size),
    count: 0,
    frequencyHz: 0,
    rateHz,
  };
}

/** The field in earth axes: the orientation is that of the sweep before, carried on by this one's rate. */
function writeEarthField(
  out: Float64Array,
  place: number,
  stride: number,
  { values, present, stepS }: Sweep,
  i: number,
  q: Float64Array,
): void {
  const at = i * CHANNELS;
  const turnS = (present[i]! & HAS_GYRO) !== 0 ? stepS : 0;
  const p = values[at + GYRO]! * turnS;
  const s = values[at + GYRO + 1]! * turnS;
  const r = values[at + GYRO + 2]! * turnS;
  const mx = values[at + MAG]!;
  const my = values[at + MAG + 1]!;
  const mz = values[at + MAG + 2]!;
  const x = mx + s * mz - r * my;
  const y = my + r * mx - p * mz;
  const z = mz + p * my - s * mx;
  const w = q[4 * i]!;
  const a = q[4 * i + 1]!;
  const b = q[4 * i + 2]!;
  const c = q[4 * i + 3]!;
  const tx = 2 * (b * z - c * y);
  const ty = 2 * (c * x - a * z);
  const tz = 2 * (a * y - b * x);
  out[place] = x + w * tx + b * tz - c * ty;
  out[stride + place] = y + w * ty + c * tx - a * tz;
  out[2 * stride + place] = z + w * tz + a * ty - b * tx;
}

/** "alternates by 12 µT at 37.0 Hz as sampled 100 times a second (63.0 and 137.0 Hz would look so, too)". */
function describe({ frequencyHz, rateHz }: Track, amplitudeUT: number): string {
  const others = SOURCES.filter(({ hz }) => Math.abs(foldedHz(hz, rateHz) - frequencyHz) < HZ_KNOWN);
  const looks =
    others.length > 0
      ? others.map(({ name }) => name).join(" or ")
      : `${(rateHz - frequencyHz).toFixed(0)} and ${(rateHz + frequencyHz).toFixed(0)} Hz`;
  const sampled = `${frequencyHz.toFixed(1)} Hz as sampled ${rateHz.toFixed(0)} times a second`;
  return `alternates by ${amplitudeUT.toFixed(0)} µT at ${sampled}; ${looks} would look so, too`;
}
