/**
 * The dashboard: a connection fills the view state; one animation-frame callback draws the newest of it, lanes at display
 * rate, text a few times a second.
 */
import type { Interpolation, MidlineView } from "../bridge/wire/messages.ts";
import { DrawLog } from "./draw-log.ts";
import { BodyWave } from "./lanes/body-wave.ts";
import { FromAbove } from "./lanes/from-above.ts";
import { FromSide } from "./lanes/from-side.ts";
import { chooseRenderer, createRenderer } from "./lanes/renderer.ts";
import { RulerLane } from "./lanes/ruler.ts";
import { Stage } from "./lanes/stage.ts";
import { Strip } from "./lanes/strip.ts";
import { initialLight, switchLight } from "./look/light.ts";
import { readPalette } from "./look/palette.ts";
import { CameraPanel } from "./panels/camera.ts";
import { DrivePanel } from "./panels/drive.ts";
import { FlagsPanel } from "./panels/flags.ts";
import { Header } from "./panels/header.ts";
import { HeadingChoice } from "./panels/heading-choice.ts";
import { Keys } from "./panels/keys.ts";
import { MarkField } from "./panels/mark-field.ts";
import { Notice } from "./panels/notice.ts";
import { SensorColumns } from "./panels/sensors.ts";
import { TailbeatPanel } from "./panels/tailbeat.ts";
import { setText } from "./panels/text.ts";
import { Connection } from "./stream/connection.ts";
import { createViewState, isLive } from "./stream/view-state.ts";

/** Numbers change this often: often enough to follow, seldom enough to read. */
const TEXT_MS = 250;
/** Where the ruler begins and ends within the page, CSS pixels. As in the style sheet. */
const RULER_LEFT = 176;
const RULER_RIGHT = 28;

/** How the body's shape between the sensors is found. */
const MIDLINE_WORDS: Record<Interpolation, string> = {
  wave: "wave midline",
  smooth: "smooth midline",
  slerp: "slerp midline",
};

const element = (id: string) => document.getElementById(id)!;

initialLight();
const page = new URL(location.href);
const view = createViewState();

const rendererName = chooseRenderer(page.searchParams.get("renderer"));
const [lanesRenderer, stripRenderer] = await Promise.all([
  createRenderer(rendererName),
  createRenderer(rendererName),
]);
const log = new DrawLog(rendererName, view);

const above = new FromAbove(element("lane-above"));
const side = new FromSide(above);
const wave = new BodyWave(element("lane-wave"));
const lanes = new Stage(element("lanes"), lanesRenderer, [
  { element: element("lane-above"), lane: above },
  { element: element("lane-side"), lane: side },
  { element: element("lane-ruler"), lane: new RulerLane(element("lane-ruler")) },
  { element: element("lane-wave"), lane: wave },
]);
const stripHost = element("lane-strip");
const strip = new Stage(stripHost, stripRenderer, [{ element: stripHost, lane: new Strip(stripHost) }]);

const sidePanel = document.querySelector<HTMLElement>(".side-panel")!;
const header = new Header();
const sensors = new SensorColumns(element("sensors"));
const tailbeat = new TailbeatPanel(element("tailbeat"));
const drive = new DrivePanel(element("drive"));
const camera = new CameraPanel(element("camera"));
const flags = new FlagsPanel();
const notice = new Notice();

let drawnText = -1;
let drawnRun: string | undefined;
let laidOut = false;
let textAtMs = Number.NEGATIVE_INFINITY;
let waiting = false;

const connection = new Connection(view, page, requestDraw);
connection.open();
const markField = new MarkField((message) => connection.send(message));
const headingChoice = new HeadingChoice((message) => connection.send(message));
new Keys(
  [
    { key: "M", does: "Mark this moment", run: () => markField.open() },
    { key: "H", does: "Choose what holds the headings", run: () => headingChoice.focus() },
    { key: "L", does: "Dark room or daylight", run: toggleLight },
  ],
  () => markField.close(),
);
element("light-button").addEventListener("click", toggleLight);
new ResizeObserver(requestLayout).observe(element("lanes"));
document.addEventListener("visibilitychange", requestLayout);
// Durations go on counting when nothing arrives.
setInterval(requestDraw, TEXT_MS);
requestDraw();

/** However much arrives, at most one drawing a display frame; none while nobody can see it. */
function requestDraw(): void {
  if (waiting || document.hidden) return;
  waiting = true;
  requestAnimationFrame(draw);
}

function requestLayout(): void {
  laidOut = false;
  requestDraw();
}

function toggleLight(): void {
  switchLight();
  requestLayout();
}

function draw(nowMs: number): void {
  waiting = false;
  const beganMs = performance.now();
  if (view.welcome !== null && view.welcome.runId !== drawnRun) startRun();
  if (sensors.build(view)) laidOut = false;
  if (!laidOut) layOut();
  if (view.textRevision !== drawnText || nowMs - textAtMs >= TEXT_MS) updateText(nowMs);
  lanes.dimmed = !isLive(view);
  lanes.draw(view);
  strip.draw(view);
  log.add(nowMs, performance.now() - beganMs);
}

function startRun(): void {
  drawnRun = view.welcome?.runId;
  for (const lane of [above, side, wave]) lane.clear();
  flags.forget();
}

/** The page's size, light or rig changed. */
function layOut(): void {
  laidOut = true;
  drawnText = -1;
  const palette = readPalette();
  const rulerIn = (width: number) => ({
    left: RULER_LEFT,
    width: Math.max(100, width - RULER_LEFT - RULER_RIGHT),
  });
  const ruler = rulerIn(element("lanes").clientWidth);
  // Columns first: their number decides how high the lane is.
  sensors.resize(ruler, view);
  lanes.resize(ruler, palette);
  strip.resize(rulerIn(stripHost.clientWidth), palette);
}

function updateText(nowMs: number): void {
  textAtMs = nowMs;
  drawnText = view.textRevision;
  header.update(view);
  tailbeat.update(view);
  drive.update(view);
  camera.update(view);
  flags.update(view, nowMs);
  notice.update(view, nowMs);
  sensors.update(view);
  markField.update(view);
  headingChoice.update(view);
  showMidline(view.status?.midline);
  letKeysScroll();
  setText(element("nose-note"), view.status?.noseMoves ? "nose sways," : "nose held still,");
  document.body.dataset.live = String(isLive(view));
}

/** A panel longer than the page scrolls, by keyboard too; one that is not needs no stop of the Tab key. */
function letKeysScroll(): void {
  if (sidePanel.scrollHeight > sidePanel.clientHeight) sidePanel.tabIndex = 0;
  else sidePanel.removeAttribute("tabindex");
}

function showMidline(midline: MidlineView | undefined): void {
  if (midline === undefined) return;
  const words = MIDLINE_WORDS[midline.by];
  const { whySmooth } = midline;
  setText(element("midline-note"), whySmooth === null ? words : `${words}: ${whySmooth}`);
}
