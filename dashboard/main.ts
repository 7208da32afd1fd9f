/**
 * The page: a connection fills the view state; one animation-frame callback draws the newest of it, lanes at display rate,
 * text a few times a second.
 */

import { DrawLog } from "./draw-log.ts";
import { Stage } from "./lanes/stage.ts";
import { Controls } from "./panels/controls.ts";
import { FlagsPanel } from "./panels/flags.ts";
import { drawHeader } from "./panels/header.ts";
import { drawNotice } from "./panels/notice.ts";
import { SensorsPanel } from "./panels/sensors.ts";
import { TailbeatPanel } from "./panels/tailbeat.ts";
import { Connection } from "./stream/connection.ts";
import { ViewState } from "./stream/view-state.ts";

/** Numbers change this often: often enough to follow, seldom enough to read. */
const TEXT_MS = 250;

const view = new ViewState();
const stage = await Stage.create(new URLSearchParams(location.search).get("renderer"));
const log = new DrawLog(stage.rendererName, view);
const tailbeat = new TailbeatPanel();
const flags = new FlagsPanel();
const sensors = new SensorsPanel();

let placedFor: object | null | undefined;
let drawnRevision = -1;
let textAtMs = Number.NEGATIVE_INFINITY;
let waiting = false;

const connection = new Connection(view, requestDraw);
new Controls({
  sendMark: (text) => connection.send({ type: "add mark", text }),
  onLight: place,
});

new ResizeObserver(place).observe(document.querySelector("#lanes") as Element);
document.addEventListener("visibilitychange", requestDraw);
// Durations go on counting when nothing arrives.
setInterval(requestDraw, TEXT_MS);
place();

/** However much arrives, at most one drawing a display frame; none while nobody can see it. */
function requestDraw(): void {
  if (waiting || document.hidden) return;
  waiting = true;
  requestAnimationFrame(draw);
}

function draw(nowMs: number): void {
  waiting = false;
  const began = performance.now();
  if (view.welcome !== placedFor) place();
  const changed = view.revision !== drawnRevision;
  if (nowMs - textAtMs >= TEXT_MS || changed) {
    textAtMs = nowMs;
    drawnRevision = view.revision;
    drawHeader(view);
    drawNotice(view);
    tailbeat.draw(view);
    flags.draw(view);
    sensors.draw(view);
  }
  stage.draw(view, nowMs);
  log.add(nowMs, performance.now() - began);
}

/** The page's size, light or rig changed. */
function place(): void {
  placedFor = view.welcome;
  // Columns first: their number decides how high the section is.
  sensors.place(view, stage.ruler);
  stage.place(view);
  sensors.place(view, stage.ruler);
  sensors.draw(view);
  requestDraw();
}
