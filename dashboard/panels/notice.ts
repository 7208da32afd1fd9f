/** The designed states: what is shown over the lanes when there is no live picture, and what to do about it. */
import type { Severity } from "../../bridge/wire/flag.ts";
import type { ViewState } from "../stream/view-state.ts";
import { type LinkWord, linkWord } from "./header.ts";
import { setText } from "./words.ts";

interface Notice {
  readonly severity: Severity;
  readonly title: string;
  readonly text: string;
}

export function drawNotice(view: ViewState): void {
  const element = document.getElementById("notice") as HTMLElement;
  const notice = noticeFor(view, linkWord(view));
  element.hidden = notice === null;
  if (notice === null) return;
  element.dataset.severity = notice.severity;
  setText(element.querySelector("strong") as Element, notice.title);
  setText(element.querySelector("span") as Element, notice.text);
}

export function noticeFor({ status, welcome, hasFrame }: ViewState, word: LinkWord): Notice | null {
  const detail = status?.linkDetail ?? "";
  const since = hasFrame ? " The shape is the last one received." : "";
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
        text: `Start it again; this page finds it by itself.${since}`,
      };
    case "opening":
      return { severity: "notice", title: "Waiting for the port", text: detail };
    case "closed":
      return { severity: "alarm", title: "Unplugged", text: `${detail}${since}` };
    case "silent":
      if (!hasFrame) return { severity: "notice", title: "Waiting for the first sweep", text: detail };
      return { severity: "alarm", title: "The link is silent", text: `${detail}${since}` };
    case "ended":
      return {
        severity: "notice",
        title: welcome?.source.kind === "trial" ? "The trial has ended" : "The run has ended",
        text: `${detail}.${since}`.replace("..", "."),
      };
    case "flowing":
      if (hasFrame) return null;
      return { severity: "notice", title: "Waiting for the first sweep", text: detail };
  }
}
