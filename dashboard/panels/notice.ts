/** The designed states: what is shown over the lanes when there is no live picture, and what to do about it. */
import type { Severity } from "../../bridge/wire/flag.ts";
import type { ViewState } from "../stream/view-state.ts";
import { type LinkWord, linkWord } from "./header.ts";
import { duration, setText } from "./words.ts";

interface Notice {
  readonly severity: Severity;
  readonly title: string;
  readonly text: string;
}

export function drawNotice(view: ViewState): void {
  const element = document.getElementById("notice") as HTMLElement;
  const notice = noticeFor(view, linkWord(view), performance.now());
  element.hidden = notice === null;
  if (notice === null) return;
  element.dataset.severity = notice.severity;
  setText(element.querySelector("strong") as Element, notice.title);
  setText(element.querySelector("span") as Element, notice.text);
}

/** @param nowMs page time, for how old the shape is */
export function noticeFor(view: ViewState, word: LinkWord, nowMs: number): Notice | null {
  const { status, welcome, hasFrame } = view;
  const detail = status?.linkDetail ?? "";
  const age = hasFrame ? `The shape is ${duration((nowMs - view.frameAtMs) / 1000)} old.` : "";
  switch (word) {
    case "connecting":
      return {
        severity: "notice",
        title: "Connecting to the bridge",
        text: "If this stays, start it: npm start.",
      };
    case "refused":
      return {
        severity: "alarm",
        title: "The bridge refuses this page",
        text: "It may be of another version, or want a token. Open the address that it printed, or reload.",
      };
    case "gone":
      return {
        severity: "alarm",
        title: "The bridge is gone",
        text: sentences("Start it again; this page finds it by itself.", age),
      };
    case "opening":
      return { severity: "notice", title: "Waiting for the port", text: detail };
    case "closed":
      return { severity: "alarm", title: "Unplugged", text: sentences(detail, age) };
    case "silent":
      if (!hasFrame) return { severity: "notice", title: "Waiting for the first sweep", text: detail };
      return { severity: "alarm", title: "The link is silent", text: sentences(detail, age) };
    case "ended":
      return {
        severity: "notice",
        title: welcome?.source.kind === "trial" ? "The trial has ended" : "The run has ended",
        text: sentences(detail, age),
      };
    case "flowing":
      if (hasFrame) return null;
      return { severity: "notice", title: "Waiting for the first sweep", text: detail };
  }
}

function sentences(...parts: readonly string[]): string {
  return parts.filter((part) => part !== "").join(" ");
}
