/** What dashboards send: checked here, before anything acts on it. */
import { z } from "zod";
import {
  type DashboardMessage,
  HEADINGS,
  MAX_CLIENT_MESSAGE_BYTES,
  MAX_MARK_LENGTH,
} from "../wire/messages.ts";

const addMark = z.strictObject({
  type: z.literal("add mark"),
  text: z.string().trim().min(1).max(MAX_MARK_LENGTH),
});

const choose = z.strictObject({ type: z.literal("choose"), heading: z.enum(HEADINGS) });

const anyMessage = z.discriminatedUnion("type", [addMark, choose]);

/** @returns the message, or one sentence on why it is refused */
export function readClientMessage(data: Buffer, isBinary: boolean): DashboardMessage | string {
  if (isBinary) return "binary messages are not understood";
  if (data.length > MAX_CLIENT_MESSAGE_BYTES) return `longer than ${MAX_CLIENT_MESSAGE_BYTES} bytes`;
  let json: unknown;
  try {
    json = JSON.parse(data.toString("utf8"));
  } catch {
    return "not JSON";
  }
  const result = anyMessage.safeParse(json);
  if (result.success) return result.data;
  const issue = result.error.issues[0];
  return `${issue?.path.join(".") || "message"}: ${issue?.message ?? "not understood"}`;
}

/** Allows `perSecond` messages a second on average, twice that in a burst. */
export class RateLimit {
  readonly #perSecond: number;
  #allowance: number;
  #lastMs = Number.NEGATIVE_INFINITY;

  constructor(perSecond: number) {
    this.#perSecond = perSecond;
    this.#allowance = perSecond * 2;
  }

  allows(nowMs: number): boolean {
    const earned = ((nowMs - this.#lastMs) / 1000) * this.#perSecond;
    this.#allowance = Math.min(this.#perSecond * 2, this.#allowance + Math.max(0, earned));
    this.#lastMs = nowMs;
    if (this.#allowance < 1) return false;
    this.#allowance -= 1;
    return true;
  }
}
