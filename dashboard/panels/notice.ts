/** What stands over the lanes when they are not live: what has happened, how old the shape is, and what to do. */
import { type LinkWord, linkWord, shapeAgeS, type ViewState } from "../stream/view-state.ts";
import { duration, setText } from "./text.ts";

export interface NoticeText {
  readonly title: string;
  readonly detail: string;
  readonly advice: string;
}

export class Notice {
  readonly #host = document.querySelector<HTMLElement>("#notice")!;
  readonly #title = document.querySelector<HTMLElement>("#notice-title")!;
  readonly #detail = document.querySelector<HTMLElement>("#notice-detail")!;
  readonly #advice = document.querySelector<HTMLElement>("#notice-advice")!;
  readonly #speech = document.querySelector<HTMLElement>("#link-speech")!;

  update(view: ViewState, nowMs: number): void {
    const text = noticeText(view, linkWord(view), nowMs);
    this.#host.hidden = text === null;
    setText(this.#speech, text?.title ?? "");
    if (text === null) return;
    setText(this.#title, text.title);
    setText(this.#detail, text.detail);
    setText(this.#advice, text.advice);
  }
}

/**
 * @param nowMs page time, for how old the shape is
 * @returns null when the lanes are live
 */
export function noticeText(view: ViewState, word: LinkWord, nowMs: number): NoticeText | null {
  const detail = view.status?.linkDetail ?? "";
  const shown = view.runFrameCount > 0;
  const age = shown ? `The shape is ${duration(shapeAgeS(view, nowMs))} old.` : "";
  switch (word) {
    case "connecting":
      return { title: "Connecting to the bridge", detail: "If this stays, start it: npm start.", advice: "" };
    case "refused":
      return {
        title: "The bridge refuses this page",
        detail: "It answers, but gives no stream.",
        advice: "Open the whole address that it printed when it started, with its token.",
      };
    case "other version":
      return {
        title: "This page and the bridge are of different versions",
        detail: "They would misunderstand each other, so nothing is shown.",
        advice: "Reload this page.",
      };
    case "gone":
      return {
        title: "The bridge is gone",
        detail: age,
        advice: "Start it again; this page finds it by itself.",
      };
    case "opening":
      return { title: "Waiting for the port", detail, advice: "" };
    case "closed":
      return { title: "Unplugged", detail, advice: age };
    case "silent":
      return shown
        ? { title: "The link is silent", detail, advice: age }
        : { title: "Waiting for the first sweep", detail, advice: "" };
    case "ended": {
      const title = view.welcome?.source.kind === "trial" ? "The trial has ended" : "The run has ended";
      return { title, detail, advice: age };
    }
    case "flowing":
      return shown ? null : { title: "Waiting for the first sweep", detail, advice: "" };
  }
}
