/**
 * Text messages between bridge and dashboard (JSON). Binary frames are in frame.ts. The subprotocol name carries the
 * version: a dashboard from another version is refused at the handshake.
 */
import type { Flag, Mark } from "./flag.ts";
import type { DoubtWord, GaitNumber } from "./gait.ts";

export const SUBPROTOCOL = "bendwatch.1";
/** Longest text message the bridge accepts, bytes. */
export const MAX_CLIENT_MESSAGE_BYTES = 4096;
export const MAX_MARK_LENGTH = 200;

export interface SensorView {
  readonly name: string;
  readonly station: number;
  readonly hasMag: boolean;
}

/** First message after connecting. */
export interface WelcomeMessage {
  readonly type: "welcome";
  readonly softwareVersion: string;
  readonly rigName: string;
  readonly bodyKind: "animal" | "dummy" | "foil";
  readonly lengthM: number;
  readonly widthM: number | null;
  readonly rateHz: number;
  readonly sensors: readonly SensorView[];
  /** Points of the midline in each frame, nose to tail. */
  readonly pointCount: number;
  readonly source: { readonly kind: "serial" | "trial" | "rehearsal"; readonly label: string };
  /** As the rig file says. */
  readonly heading: HeadingView;
  /** Flow speed, m/s, where the rig file gives one. */
  readonly flowMPerS: number | null;
  /** Changes whenever the bridge starts anew or a looped trial starts over: views clear their past. */
  readonly runId: string;
}

/** What holds the headings: the magnetometers, the body, or nothing but the gyroscopes. */
export const HEADINGS = ["magnetic", "relative", "free"] as const;
export type HeadingView = (typeof HEADINGS)[number];

/** silent: the port is open but nothing comes. */
export type LinkView = "opening" | "flowing" | "silent" | "closed" | "ended";

/** Twice a second, and at once when link or recording change. */
export interface StatusMessage {
  readonly type: "status";
  readonly hubTimeS: number;
  readonly link: LinkView;
  /** One sentence for the operator. */
  readonly linkDetail: string;
  readonly recording: {
    readonly state: "off" | "on" | "failed";
    /** Trial name, or why it failed. */
    readonly detail: string;
    readonly elapsedS: number;
    readonly bytes: number;
  };
  /** Sweeps in the last second. */
  readonly sweepsPerS: number;
  /** Share of samples lost over the last 60 s, 0..1. */
  readonly lostShare: number;
  /** Processing latency of the newest sweep: host now minus its arrival, ms; null when replaying. */
  readonly behindMs: number | null;
  /** Hub clock against host clock, parts per million, positive when the hub is fast; null when not yet known. */
  readonly driftPpm: number | null;
  readonly counters: {
    readonly good: number;
    readonly badChecksum: number;
    readonly discardedBytes: number;
  };
  readonly tailbeat: TailbeatView;
  /** The nose's own motion is in the midline; where not, the nose is held still, and amplitudes are against it. */
  readonly noseMoves: boolean;
  /** At present. */
  readonly heading: HeadingView;
  /** As chosen by the rig file or the operator: while the field is off, the body may hold what magnetometers should. */
  readonly chosenHeading: HeadingView;
  /** At present. */
  readonly midline: MidlineView;
}

/** How the midline is made between the sensors. */
export interface MidlineView {
  readonly by: Interpolation;
  /** Where a wave was asked for and is not in use. */
  readonly whySmooth: WhySmooth | null;
}

export type Interpolation = "slerp" | "smooth" | "wave";
export type WhySmooth = "not beating" | "learning the wave" | "sensors too far apart";

/** Of the newest cycle; all null while the body does not beat. */
export interface TailbeatView {
  readonly numbers: Readonly<Record<GaitNumber, GaitNumberView>>;
  /** Cycles in a row that agree by the rig's criterion, the newest included; 0 while the body does not beat. */
  readonly steadyCycles: number;
  /** Whether they are as many as the rig asks for. */
  readonly steady: boolean;
}

export interface GaitNumberView {
  /** SI, angles in rad; null when not known. */
  readonly value: number | null;
  /** Standard deviation over the last cycles, in the same unit; null when not known. */
  readonly spread: number | null;
  /** Why it is not to be trusted, or not known; none when it is good. */
  readonly doubts: readonly DoubtWord[];
}

/** All open flags and the most recent ended ones, newest first. Sent whenever they change, at most ten times a second. */
export interface FlagsMessage {
  readonly type: "flags";
  readonly open: readonly Flag[];
  readonly ended: readonly Flag[];
}

export interface MarksMessage {
  readonly type: "marks";
  /** Newest first, at most 50. */
  readonly marks: readonly Mark[];
}

/** The last ten minutes at one column a second: tail excursion across the travel axis. On connecting, then each second. */
export interface StripMessage {
  readonly type: "strip";
  /** Hub time of the first column, s. */
  readonly startS: number;
  readonly columnS: number;
  /** m; null where nothing was received. */
  readonly lowM: readonly (number | null)[];
  readonly highM: readonly (number | null)[];
}

/** A signal beside the drive's: of the newest window. */
export interface BesideView {
  readonly gain: number;
  /** s, positive when it follows the drive. */
  readonly lagS: number;
  /** rad, mean and straight drift taken off. */
  readonly rmse: number;
  /** With the lag taken off. */
  readonly r2: number;
}

/** The drive's own readings, and the sensors' yaw beside its yaw. With each status, once the drive has given a reading. */
export interface DriveMessage {
  readonly type: "drive";
  /** The newest reading as it came, rad and m; null where the drive gives none. */
  readonly yaw: number | null;
  readonly sway: number | null;
  /** Whether the rig file names the drive: without, there are its raw readings alone. */
  readonly named: boolean;
  /** The sensor next to the drive. */
  readonly nearest: number;
  /** How gain and lag were found; null while the drive does not move. */
  readonly method: "whole cycles" | "least squares" | null;
  /** Cycles in the window; 0 where nothing repeats itself. */
  readonly cycles: number;
  /** Length of the window, s. */
  readonly windowS: number;
  /** By sensor; null where there is none. */
  readonly sensors: readonly (BesideView | null)[];
  /** Over the newest cycle, about its means, rad: the drive's yaw and that of the sensor next to it; area in rad². */
  readonly loop: {
    readonly reference: readonly number[];
    readonly measured: readonly number[];
    readonly area: number;
  } | null;
}

/** The midline's displacement beside a camera's, over the trial so far. With each status, where a camera's was loaded. */
export interface CameraMessage {
  readonly type: "camera";
  /** All stations together; null while nothing has moved. */
  readonly overall: {
    readonly gain: number;
    /** s, positive when the bridge's follows the camera's. */
    readonly lagS: number;
    readonly rmseM: number;
    readonly r2: number;
  } | null;
}

/** A client's message was refused. */
export interface RefusalMessage {
  readonly type: "refusal";
  readonly reason: string;
}

export type BridgeMessage =
  | WelcomeMessage
  | StatusMessage
  | FlagsMessage
  | MarksMessage
  | StripMessage
  | DriveMessage
  | CameraMessage
  | RefusalMessage;

export interface AddMarkMessage {
  readonly type: "add mark";
  readonly text: string;
}

/** What the operator may choose while a trial runs. */
export interface Choice {
  /** What holds the headings from now on. */
  readonly heading: HeadingView;
}

export interface ChooseMessage extends Choice {
  readonly type: "choose";
}

export type DashboardMessage = AddMarkMessage | ChooseMessage;
