/** Invented scenes for the fake bridge: a rig, a wave, what is wrong with it, in the real messages' words. */
import { adviceFor } from "../../bridge/health/advice.ts";
import { CONDITION, TRUST } from "../../bridge/sweep.ts";
import type { Flag, FlagKind, Mark, Severity } from "../../bridge/wire/flag.ts";
import { type DoubtWord, GAIT_NUMBERS, type GaitNumber } from "../../bridge/wire/gait.ts";
import type {
  DriveMessage,
  GaitNumberView,
  LinkView,
  MidlineView,
  SensorView,
  StatusMessage,
  TailbeatView,
  WelcomeMessage,
} from "../../bridge/wire/messages.ts";

/** Of every scene. */
export const FLOW_M_PER_S = 0.35;

/** A wave that travels from nose to tail: amplitude grows with the square of the station. */
export interface Wave {
  /** 0: the body keeps one bend. */
  readonly frequencyHz: number;
  /** Waves on the body. */
  readonly waves: number;
  /** Excursion of the tail tip to either side, as a share of the length. */
  readonly tailShare: number;
}

export interface Reading {
  readonly gyro: number;
  readonly accel: number;
  /** NaN without magnetometer. */
  readonly field: number;
  readonly delivered: number;
  readonly trust: number;
  readonly conditions: number;
}

export interface Scene
  extends Pick<
      WelcomeMessage,
      "rigName" | "bodyKind" | "lengthM" | "widthM" | "rateHz" | "sensors" | "source" | "heading"
    >,
    Pick<StatusMessage, "link" | "linkDetail" | "recording" | "lostShare"> {
  readonly wave: Wave;
  /** Hub time at the start, s. */
  readonly startS: number;
  readonly open: readonly Flag[];
  readonly ended: readonly Flag[];
  readonly marks: readonly Mark[];
  /** null where the hub sends nothing of a drive. */
  readonly drive: DriveMessage | null;
  /** Sensor `i` at a hub time. */
  readonly reading: (i: number, timeS: number) => Reading;
}

/** Sensors evenly along the body. */
export function sensorsOf(count: number, change: Partial<SensorView> = {}): SensorView[] {
  return Array.from({ length: count }, (_, i) => ({
    name: `S${i + 1}`,
    station: Number((0.03 + (i * 0.94) / (count - 1)).toFixed(4)),
    hasMag: true,
    ...change,
  }));
}

export function healthyScene(count = 6): Scene {
  return {
    rigName: "Ribbon foil, tank 3",
    bodyKind: "foil",
    lengthM: 0.62,
    widthM: 0.05,
    rateHz: 100,
    sensors: sensorsOf(count),
    source: { kind: "rehearsal", label: "Rehearsal of the ribbon foil" },
    heading: "magnetic",
    link: "flowing",
    linkDetail: "",
    recording: { state: "on", detail: "2026-06-01-trial-7", elapsedS: 252, bytes: 4_180_000 },
    lostShare: 0,
    wave: { frequencyHz: 1.5, waves: 0.9, tailShare: 0.11 },
    startS: 640,
    open: [],
    ended: [],
    marks: [],
    drive: null,
    reading: healthyReading,
  };
}

export function healthyReading(i: number, timeS: number): Reading {
  const sway = Math.sin(timeS / 3 + i);
  return {
    gyro: 0.55 + 0.06 * sway,
    accel: 0.72 + 0.05 * sway,
    field: 0.03 + 0.01 * sway,
    delivered: 1,
    trust: TRUST.GOOD,
    conditions: 0,
  };
}

/** Writes x, y, z of evenly spaced points: travel axes, nose at 0, tail negative. */
export function writeMidline(wave: Wave, lengthM: number, timeS: number, out: Float32Array): void {
  const last = out.length / 3 - 1;
  for (let point = 0; point <= last; point++) {
    const station = point / last;
    const phase = 2 * Math.PI * (wave.frequencyHz * timeS - wave.waves * station);
    out[3 * point] = -station * lengthM;
    out[3 * point + 1] = wave.tailShare * lengthM * station * station * Math.sin(phase);
    out[3 * point + 2] = 0.012 * lengthM * station * Math.sin(phase / 3);
  }
}

/** The numbers of a wave that is just so, as the bridge would give them in a flow of FLOW_M_PER_S. */
export function tailbeatOf({ frequencyHz, waves, tailShare }: Wave, lengthM: number): TailbeatView {
  const beats = frequencyHz > 0;
  const waveSpeed = (frequencyHz * lengthM) / waves;
  const values: Record<GaitNumber, number> = {
    frequencyHz,
    tailAmplitudeM: 2 * tailShare * lengthM,
    headAmplitudeM: 0.0002,
    phaseLag: 2 * Math.PI * waves,
    wavelengthM: lengthM / waves,
    waveSpeedMPerS: waveSpeed,
    travellingIndex: 0.74,
    meanBend: -0.037,
    strouhal: (2 * tailShare * lengthM * frequencyHz) / FLOW_M_PER_S,
    slip: FLOW_M_PER_S / waveSpeed,
    reynolds: Number.NaN,
  };
  const doubts: Partial<Record<GaitNumber, DoubtWord[]>> = {
    headAmplitudeM: ["below noise"],
    phaseLag: ["below noise"],
    reynolds: ["no temperature"],
  };
  const views = GAIT_NUMBERS.map((name): [GaitNumber, GaitNumberView] => {
    const known = beats && Number.isFinite(values[name]);
    return [
      name,
      {
        value: known ? values[name] : null,
        spread: known ? Math.abs(0.012 * values[name]) : null,
        doubts: beats ? (doubts[name] ?? []) : [],
      },
    ];
  });
  const numbers = Object.fromEntries(views) as TailbeatView["numbers"];
  return { numbers, steadyCycles: beats ? 12 : 0, steady: beats };
}

/** A status of the healthy scene whose link is in some state. */
export function statusOf(link: LinkView, linkDetail = ""): StatusMessage {
  const { recording, wave, lengthM, heading } = healthyScene();
  return {
    type: "status",
    hubTimeS: 12,
    link,
    linkDetail,
    recording,
    sweepsPerS: 0,
    lostShare: 0,
    behindMs: null,
    driftPpm: null,
    counters: { good: 0, badChecksum: 0, discardedBytes: 0 },
    tailbeat: tailbeatOf(wave, lengthM),
    noseMoves: true,
    heading,
    chosenHeading: heading,
    midline: midlineOf(wave),
  };
}

/** How the midline of a wave is made. */
export function midlineOf({ frequencyHz }: Wave): MidlineView {
  return frequencyHz > 0 ? { by: "wave", whySmooth: null } : { by: "smooth", whySmooth: "not beating" };
}

export interface FlagRequest {
  readonly kind: FlagKind;
  readonly severity: Severity;
  readonly detail: string;
  readonly startS: number;
  readonly endS?: number;
  readonly id: number;
}

/** A flag on sensor `sensor` (-1: the rig) with the advice that the bridge gives. */
export function flagOn(sensor: number, sensors: readonly SensorView[], request: FlagRequest): Flag {
  return { endS: null, ...request, sensor, advice: adviceFor(request.kind, sensor, sensors) };
}

/** An alarm and a caution are open, some flags ended, two marks were made. */
export function troubledScene(count = 6): Scene {
  const scene = healthyScene(count);
  const { sensors, startS } = scene;
  return {
    ...scene,
    lostShare: 0.013,
    open: [
      flagOn(4, sensors, {
        id: 7,
        kind: "gyro saturation",
        severity: "alarm",
        detail: "18 % of the last second at full scale, on z",
        startS: startS - 3,
      }),
      flagOn(3, sensors, {
        id: 6,
        kind: "magnetic interference",
        severity: "caution",
        detail: "field 31 % off",
        startS: startS - 12,
      }),
    ],
    ended: [
      flagOn(1, sensors, {
        id: 5,
        kind: "lost samples",
        severity: "caution",
        detail: "2.4 % of 60 s lost",
        startS: startS - 130,
        endS: startS - 90,
      }),
      flagOn(-1, sensors, {
        id: 4,
        kind: "link silent",
        severity: "alarm",
        detail: "nothing for 1.2 s",
        startS: startS - 410,
        endS: startS - 405,
      }),
    ],
    marks: [
      { timeS: startS - 60, text: "flow raised to 0.35 m/s", from: "operator" },
      { timeS: startS - 300, text: "Button 1", from: "hub button" },
    ],
    reading: (i, timeS) => {
      const healthy = healthyReading(i, timeS);
      if (i === 4) return { ...healthy, gyro: 0, trust: TRUST.CLIPPED, conditions: CONDITION.GYRO_CLIPPED };
      if (i !== 3) return healthy;
      return { ...healthy, field: 0.31, trust: TRUST.HEADING_UNAIDED, conditions: CONDITION.MAG_DISTURBED };
    },
  };
}

/** A drive at the leading edge, that the first sensor follows by 31 ms. */
export function drivenScene(scene: Scene = healthyScene()): Scene {
  const angles = Array.from({ length: 46 }, (_, i) => (2 * Math.PI * i) / 46);
  const amplitude = 0.157;
  const gain = 0.93;
  const lagAngle = 2 * Math.PI * scene.wave.frequencyHz * 0.031;
  return {
    ...scene,
    drive: {
      type: "drive",
      yaw: 0.12,
      sway: -0.0043,
      named: true,
      nearest: 0,
      method: "whole cycles",
      cycles: 4,
      windowS: 2.67,
      sensors: scene.sensors.map((_, i) => ({
        gain: gain + i / 4,
        lagS: 0.031 + 0.1 * i,
        rmse: 0.032,
        r2: 0.998,
      })),
      loop: {
        reference: angles.map((angle) => amplitude * Math.sin(angle)),
        measured: angles.map((angle) => gain * amplitude * Math.sin(angle - lagAngle)),
        area: Math.PI * gain * amplitude ** 2 * Math.sin(lagAngle),
      },
    },
  };
}

/** Sensors without magnetometer: the heading runs free. */
export function sixAxisScene(count = 6): Scene {
  return {
    ...healthyScene(count),
    rigName: "Six-axis foil",
    heading: "free",
    sensors: sensorsOf(count, { hasMag: false }),
    reading: (i, timeS) => ({
      ...healthyReading(i, timeS),
      field: Number.NaN,
      trust: TRUST.HEADING_UNAIDED,
    }),
  };
}

const LONG_NAMES = [
  "Head, behind the left eye",
  "Front of the dorsal fin",
  "Middle of the trunk, dorsal",
  "Behind the dorsal fin",
  "Peduncle, upper keel",
  "Fluke notch",
];

/** Names as long as people write them, on six sensors, a rig and a source as long, and a failure that takes telling. */
export function longNamesScene(): Scene {
  return {
    ...troubledScene(),
    recording: {
      state: "failed",
      detail: "no space left on the disk of the trials; 12 packets were not kept",
      elapsedS: 252,
      bytes: 4_180_000,
    },
    rigName: "Jointed training dummy with the second tail, long basin, northern carriage",
    source: {
      kind: "trial",
      label: "2026-06-01 afternoon, second attempt after the plug was dried, at half speed",
    },
    sensors: sensorsOf(6).map((sensor, i) => ({ ...sensor, name: LONG_NAMES[i]! })),
  };
}
