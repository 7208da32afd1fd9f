import { expect, test } from "vitest";
import type { LinkView, StatusMessage } from "../../bridge/wire/messages.ts";
import { linkWord } from "../../dashboard/panels/header.ts";
import { noticeFor } from "../../dashboard/panels/notice.ts";
import { type Connection, ViewState } from "../../dashboard/stream/view-state.ts";
import { healthyScene, tailbeatOf } from "../support/scene.ts";

function viewWith(
  connection: Connection,
  link: LinkView | null,
  linkDetail = "",
  hasFrame = true,
): ViewState {
  const { recording, wave, lengthM } = healthyScene();
  const view = new ViewState();
  view.setConnection(connection);
  view.hasFrame = hasFrame;
  if (link === null) return view;
  const status: StatusMessage = {
    type: "status",
    hubTimeS: 12,
    link,
    linkDetail,
    recording,
    sweepsPerS: 0,
    lostShare: 0,
    behindMs: null,
    driftPpm: null,
    counters: { good: 0, badChecksum: 0, discardedBytes: 0 },
    tailbeat: tailbeatOf(wave, lengthM),
  };
  view.takeMessage(status);
  return view;
}

/** Page time at which the notices are made; the newest frame came at 0. */
const NOW_MS = 7300;

const LINKS: readonly LinkView[] = ["opening", "flowing", "silent", "closed", "ended"];

test("our own connection is told before what the bridge last said of its link", () => {
  for (const connection of ["connecting", "gone", "refused"] as const) {
    expect(linkWord(viewWith(connection, "flowing"))).toBe(connection);
  }
  expect(linkWord(viewWith("connected", "silent"))).toBe("silent");
  expect(linkWord(viewWith("connected", null))).toBe("connecting");
});

test("only a live picture goes without a notice", () => {
  for (const link of LINKS) {
    const view = viewWith("connected", link);
    expect(noticeFor(view, linkWord(view), NOW_MS) === null, link).toBe(link === "flowing");
  }
  const early = viewWith("connected", "flowing", "", false);
  expect(noticeFor(early, linkWord(early), NOW_MS)?.title).toMatch(/first sweep/i);
});

test.each(["silent", "closed", "ended"] as const)("%s: the notice says how old the shape is", (link) => {
  const view = viewWith("connected", link);
  expect(noticeFor(view, link, NOW_MS)?.text).toContain("7.3 s");
  expect(noticeFor(view, link, 12 * NOW_MS)?.text).toContain("88 s");
});

test.each(["", "Invented reason."])(
  "every notice is made of whole sentences, with the detail '%s'",
  (detail) => {
    for (const link of LINKS) {
      for (const hasFrame of [true, false]) {
        const view = viewWith("connected", link, detail, hasFrame);
        const text = noticeFor(view, linkWord(view), NOW_MS)?.text ?? "";
        expect(text, link).toMatch(/^$|^\w.*\w[.]$/);
        expect(text, link).not.toMatch(/ {2}|\.\.|\. \.|[a-z] The/);
      }
    }
  },
);
