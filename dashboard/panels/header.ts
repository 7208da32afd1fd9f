/** The header: which rig, where the bytes come from, whether they are kept, whether they come. */
import type { Severity } from "../../bridge/wire/flag.ts";
import type { StatusMessage } from "../../bridge/wire/messages.ts";
import { setGlyph, setSeverity } from "../lanes/glyphs.ts";
import { type LinkWord, linkWord, type ViewState } from "../stream/view-state.ts";
import { clock, count, percent, setText } from "./text.ts";

const SEVERITIES: Partial<Record<LinkWord, Severity>> = {
  gone: "alarm",
  silent: "alarm",
  closed: "alarm",
  refused: "alarm",
  "other version": "alarm",
};

export class Header {
  readonly #rig = document.querySelector<HTMLElement>("#rig-name")!;
  readonly #source = document.querySelector<HTMLElement>("#source")!;
  readonly #recordingGlyph = document.querySelector<HTMLElement>("#recording-glyph")!;
  readonly #recording = document.querySelector<HTMLElement>("#recording")!;
  readonly #linkGlyph = document.querySelector<HTMLElement>("#link-glyph")!;
  readonly #link = document.querySelector<HTMLElement>("#link-state")!;

  update(view: ViewState): void {
    const { welcome } = view;
    setText(this.#rig, welcome?.rigName ?? "Bendwatch");
    document.title = welcome === null ? "Bendwatch" : `${welcome.rigName}, Bendwatch`;
    setText(this.#source, welcome?.source.label ?? "");
    this.#source.title = welcome?.source.label ?? "";
    this.#showRecording(view);
    this.#showLink(view);
  }

  #showLink(view: ViewState): void {
    const word = linkWord(view);
    this.#link.dataset.state = word;
    setText(this.#link, linkSentence(view, word));
    this.#link.title = linkDetails(view);
    const severity = SEVERITIES[word] ?? null;
    setSeverity(this.#link, severity);
    setGlyph(this.#linkGlyph, severity);
  }

  #showRecording(view: ViewState): void {
    const recording = view.bridge === "connected" ? view.status?.recording : undefined;
    const [sentence, severity] = recording === undefined ? ["", null] : recordingSentence(view, recording);
    setText(this.#recording, sentence);
    setSeverity(this.#recording, severity);
    this.#recording.title = recording?.detail ?? "";
    this.#recordingGlyph.classList.toggle("recording", recording?.state === "on");
    setGlyph(this.#recordingGlyph, severity);
  }
}

/** Whether the trial is kept, and how bad it is when it is not. */
function recordingSentence(
  { welcome, status }: ViewState,
  { state, detail, elapsedS }: StatusMessage["recording"],
): readonly [string, Severity | null] {
  const hubTimeS = status?.hubTimeS ?? 0;
  if (state === "on") return [`Recording ${clock(elapsedS)}`, null];
  if (state === "failed") return [`Recording has failed: ${detail}`, "alarm"];
  if (welcome?.source.kind === "trial") return [`Replaying ${clock(hubTimeS)}`, null];
  if (welcome?.source.kind === "rehearsal") return [`Rehearsal ${clock(hubTimeS)}, not recorded`, null];
  return ["Not recording", "caution"];
}

function linkSentence({ welcome, status }: ViewState, word: LinkWord): string {
  switch (word) {
    case "connecting":
      return "Connecting to the bridge";
    case "refused":
      return "The bridge refuses this page";
    case "other version":
      return "The bridge is of another version";
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

function flowing(sensors: number, status: StatusMessage | null): string {
  if (status === null) return "";
  const parts = [
    count(sensors, "sensor", "sensors"),
    `${Math.round(status.sweepsPerS)} sweeps a second`,
    `${percent(status.lostShare, 2)} lost`,
  ];
  if (status.behindMs !== null) parts.push(`${Math.round(status.behindMs)} ms behind`);
  return parts.join(", ");
}

/** For who wants to know more: shown when the pointer rests on the sentence. */
function linkDetails({ status }: ViewState): string {
  if (status === null) return "";
  const { linkDetail, counters, driftPpm } = status;
  const { good, badChecksum, discardedBytes } = counters;
  const lines = [
    linkDetail,
    `${good} packets good, ${badChecksum} with a wrong checksum, ${discardedBytes} bytes discarded.`,
  ];
  if (driftPpm !== null) {
    lines.push(
      `The hub's clock runs ${Math.abs(driftPpm).toFixed(0)} ppm ${driftPpm < 0 ? "slow" : "fast"}.`,
    );
  }
  return lines.filter((line) => line !== "").join("\n");
}
