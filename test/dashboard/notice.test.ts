import { expect, test } from "vitest";
import type { LinkView } from "../../bridge/wire/messages.ts";
import { noticeText } from "../../dashboard/panels/notice.ts";
import {
  type BridgeView,
  createViewState,
  linkWord,
  setBridge,
  takeMessage,
  type ViewState,
} from "../../dashboard/stream/view-state.ts";
import { statusOf } from "../support/scene.ts";

function viewWith(bridge: BridgeView, link: LinkView | null, linkDetail = "", hasFrame = true): ViewState {
  const view = createViewState();
  setBridge(view, bridge);
  view.runFrameCount = hasFrame ? 1 : 0;
  if (link !== null) takeMessage(view, statusOf(link, linkDetail));
  return view;
}

/** Page time at which the notices are made; the newest frame came at 0. */
const NOW_MS = 7300;

const LINKS: readonly LinkView[] = ["opening", "flowing", "silent", "closed", "ended"];

test("only a live picture goes without a notice", () => {
  for (const link of LINKS) {
    const view = viewWith("connected", link);
    expect(noticeText(view, linkWord(view), NOW_MS) === null, link).toBe(link === "flowing");
  }
  const early = viewWith("connected", "flowing", "", false);
  expect(noticeText(early, linkWord(early), NOW_MS)?.title).toMatch(/first sweep/i);
});

test.each(["silent", "closed", "ended"] as const)("%s: the notice says how old the shape is", (link) => {
  const view = viewWith("connected", link);
  expect(noticeText(view, link, NOW_MS)?.advice).toContain(" 7 s ");
  expect(noticeText(view, link, 12 * NOW_MS)?.advice).toContain(" 87 s ");
});

test.each(["", "Invented reason."])(
  "every notice is made of whole sentences, with the detail '%s'",
  (detail) => {
    for (const bridge of ["connecting", "connected", "gone", "refused", "other version"] as const) {
      for (const link of LINKS) {
        for (const hasFrame of [true, false]) {
          const view = viewWith(bridge, link, detail, hasFrame);
          const notice = noticeText(view, linkWord(view), NOW_MS);
          for (const text of [notice?.detail ?? "", notice?.advice ?? ""]) {
            expect(text, link).toMatch(/^$|^\w.*\w[.]$/);
            expect(text, link).not.toMatch(/ {2}|\.\.|\. \.|[a-z] The/);
          }
        }
      }
    }
  },
);
