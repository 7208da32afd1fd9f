/** The header: which rig, where the bytes come from, whether they come, whether they are kept. */
import type { ViewState } from "../stream/view-state.ts";
import { clock, finePercent, setText } from "./words.ts";

const byId = (id: string) => document.getElementById(id) as HTMLElement;

export type LinkWord =
  | "connecting"
  | "refused"
  | "gone"
  | "opening"
  | "flowing"
  | "silent"
  | "closed"
  | "ended";

/** What is true of the link as a whole, from the bridge's side and ours. */
export function linkWord({ connection, status }: ViewState): LinkWord {
  if (connection !== "connected") return connection;
  return status?.link ?? "connecting";
}

export function drawHeader(view: ViewState): void {
  const { welcome } = view;
  setText(byId("rig-name"), welcome?.rigName ?? "Bendwatch");
  byId("rig-name").title = welcome?.rigName ?? "";
  setText(byId("source"), welcome?.source.label ?? "");
  document.title = welcome === null ? "Bendwatch" : `${welcome.rigName} · Bendwatch`;
  const word = linkWord(view);
  const link = byId("link-state");
  link.dataset.state = word;
  setText(link, linkSentence(view, word));
  link.title = linkDetails(view);
  drawRecording(view);
}

/** For who wants to know more: shown when the pointer rests on the sentence. */
function linkDetails({ status }: ViewState): string {
  if (status === null) return "";
  const { linkDetail, counters, driftPpm } = status;
  return [
    linkDetail,
    `${counters.good} packets good, ${counters.badChecksum} with a wrong checksum, ${counters.discardedBytes} bytes discarded.`,
    driftPpm === null
      ? ""
      : `The hub's clock runs ${Math.abs(driftPpm).toFixed(0)} ppm ${driftPpm < 0 ? "slow" : "fast"}.`,
  ]
    .filter((line) => line !== "")
    .join("\n");
}

function drawRecording({ welcome, status, connection }: ViewState): void {
  const recording = status?.recording;
  const state = connection === "connected" ? (recording?.state ?? "off") : "off";
  byId("run-dot").dataset.state = state;
  let text = "";
  if (connection === "connected" && recording !== undefined) {
    if (state === "on") text = `Recording ${clock(recording.elapsedS)}`;
    else if (state === "failed") text = `Recording has failed: ${recording.detail}`;
    else if (welcome?.source.kind === "trial") text = `Replaying ${clock(status?.hubTimeS ?? 0)}`;
    else if (welcome?.source.kind === "rehearsal")
      text = `Rehearsal ${clock(status?.hubTimeS ?? 0)}, not recorded`;
    else text = "Not recording";
  }
  setText(byId("recording"), text);
  byId("recording").title = recording?.detail ?? "";
}

function linkSentence({ welcome, status }: ViewState, word: LinkWord): string {
  switch (word) {
    case "connecting":
      return "Connecting to the bridge";
    case "refused":
      return "The bridge refuses this page";
    case "gone":
      return "The bridge is gone; trying again";
    case "opening":
      return "Waiting for the port";
    case "closed":
      return "The port is closed; trying again";
    case "silent":
      return "The link is silent";
    case "ended":
      return "The end";
    case "flowing":
      return flowing(welcome?.sensors.length ?? 0, status);
  }
}

function flowing(sensors: number, status: ViewState["status"]): string {
  if (status === null) return "";
  const behind = status.behindMs === null ? "" : `, ${Math.round(status.behindMs)} ms behind`;
  const rate = `${sensors} sensors, ${Math.round(status.sweepsPerS)} sweeps a second`;
  return `${rate}, ${finePercent(status.lostShare)} lost${behind}`;
}
