/**
 * What the screen shows, written by the socket's handlers and read by whatever draws. Frames go into typed arrays that
 * are reused; text messages replace the one before. `textRevision` and `frameCount` tell a reader what is new.
 */
import { createDisplayFrame, type DisplayFrame, decodeFrame } from "../../bridge/wire/frame.ts";
import type {
  BridgeMessage,
  CameraMessage,
  DriveMessage,
  FlagsMessage,
  LinkView,
  MarksMessage,
  RefusalMessage,
  StatusMessage,
  StripMessage,
  WelcomeMessage,
} from "../../bridge/wire/messages.ts";
import { PastMidlines } from "./past.ts";

/** How the page stands with the bridge itself. gone: does not answer; refused: answers, but gives no stream. */
export type BridgeView = "connecting" | "connected" | "gone" | "other version" | "refused";

export interface ViewState {
  bridge: BridgeView;
  welcome: WelcomeMessage | null;
  status: StatusMessage | null;
  flags: FlagsMessage | null;
  marks: MarksMessage | null;
  strip: StripMessage | null;
  /** null until the drive has given a reading. */
  drive: DriveMessage | null;
  /** null unless a camera's midlines were loaded. */
  camera: CameraMessage | null;
  /** The bridge's last refusal of a mark that this page sent. Every refusal is an object of its own. */
  refusal: RefusalMessage | null;
  readonly frame: DisplayFrame;
  past: PastMidlines;
  /** Frames received since the page was opened. */
  frameCount: number;
  /** Frames of this run; 0 means nothing to draw yet. */
  runFrameCount: number;
  /** Page time of the newest frame, ms. */
  frameAtMs: number;
  textRevision: number;
}

export function createViewState(): ViewState {
  return {
    bridge: "connecting",
    welcome: null,
    status: null,
    flags: null,
    marks: null,
    strip: null,
    drive: null,
    camera: null,
    refusal: null,
    frame: createDisplayFrame(0, 0),
    past: new PastMidlines(0),
    frameCount: 0,
    runFrameCount: 0,
    frameAtMs: 0,
    textRevision: 0,
  };
}

/**
 * Takes a binary message.
 * @param nowMs page time
 * @returns false when it is not a frame this page understands
 */
export function takeFrame(view: ViewState, bytes: DataView, nowMs: number): boolean {
  const { frame } = view;
  if (!decodeFrame(bytes, frame)) return false;
  if (view.past.pointCount !== frame.pointCount) view.past = new PastMidlines(frame.pointCount);
  // A clock that runs backwards belongs to another run, whose welcome is on its way.
  if (view.past.newestS > frame.hubTimeS) view.past.clear();
  view.past.push(frame.hubTimeS, frame.midline);
  view.frameCount++;
  view.runFrameCount++;
  view.frameAtMs = nowMs;
  return true;
}

export function takeMessage(view: ViewState, message: BridgeMessage): void {
  view.textRevision++;
  switch (message.type) {
    case "welcome":
      if (view.welcome?.runId !== message.runId) clearRun(view);
      view.welcome = message;
      break;
    case "status":
      view.status = message;
      break;
    case "flags":
      view.flags = message;
      break;
    case "marks":
      view.marks = message;
      break;
    case "strip":
      view.strip = message;
      break;
    case "drive":
      view.drive = message;
      break;
    case "camera":
      view.camera = message;
      break;
    case "refusal":
      view.refusal = message;
      break;
  }
}

export function setBridge(view: ViewState, bridge: BridgeView): void {
  if (view.bridge === bridge) return;
  view.bridge = bridge;
  view.textRevision++;
}

/** What is true of the link as a whole, from the bridge's side and ours. */
export type LinkWord = Exclude<BridgeView, "connected"> | LinkView;

export function linkWord({ bridge, status }: ViewState): LinkWord {
  if (bridge !== "connected") return bridge;
  return status?.link ?? "connecting";
}

/** Whether what is shown is now: sweeps are flowing. */
export function isLive(view: ViewState): boolean {
  return linkWord(view) === "flowing";
}

function clearRun(view: ViewState): void {
  view.status = null;
  view.flags = null;
  view.marks = null;
  view.strip = null;
  view.drive = null;
  view.camera = null;
  view.past.clear();
  view.runFrameCount = 0;
}

/** How long ago the newest sweep arrived, s: by the bridge's word where it has one, for a page opened since. */
export function shapeAgeS({ frameAtMs, status }: ViewState, nowMs: number): number {
  return Math.max(nowMs - frameAtMs, status?.behindMs ?? 0) / 1000;
}

/**
 * Hub time as far as the page can tell, s: that of the newest frame, and what has passed since where the hub goes on but
 * nothing arrives. A trial that has ended stands still.
 */
export function hubTimeNow(view: ViewState, nowMs: number): number {
  const newestS = Math.max(view.frame.hubTimeS, view.status?.hubTimeS ?? 0);
  const waiting = view.frameAtMs > 0 && !isLive(view) && linkWord(view) !== "ended";
  return waiting ? newestS + shapeAgeS(view, nowMs) : newestS;
}
