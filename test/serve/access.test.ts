import type { IncomingMessage } from "node:http";
import { expect, test } from "vitest";
import { BendwatchError } from "../../bridge/errors.ts";
import { Access } from "../../bridge/serve/access.ts";

const asks = (headers: Record<string, string>, url = "/stream") =>
  ({ headers, url }) as unknown as IncomingMessage;
const TOKEN = "correct-horse-battery";

test("beyond this machine a token is required, and a short one is refused", () => {
  expect(() => new Access({ host: "0.0.0.0" })).toThrow(BendwatchError);
  expect(() => new Access({ host: "0.0.0.0", token: "short" })).toThrow(/at least 12/);
  expect(() => new Access({ host: "0.0.0.0", token: TOKEN })).not.toThrow();
});

test("a page from this address may open the stream; one from elsewhere may not", () => {
  const access = new Access({ host: "127.0.0.1" });
  const host = "127.0.0.1:4180";
  expect(access.streamRefusal(asks({ host, origin: `http://${host}` }))).toBeNull();
  expect(access.streamRefusal(asks({ host }))).toBeNull();
  expect(access.streamRefusal(asks({ host, origin: "http://elsewhere.example" }))).toMatch(/another address/);
  expect(access.streamRefusal(asks({ host, origin: "null" }))).toMatch(/another address/);
});

test("a name re-pointed at this address is refused, page and stream alike", () => {
  const access = new Access({ host: "127.0.0.1" });
  const request = asks({ host: "rebound.example:4180", origin: "http://rebound.example:4180" });
  expect(access.refusal(request)).toMatch(/unknown host/);
  expect(access.streamRefusal(request)).toMatch(/unknown host/);
  expect(access.refusal(asks({}))).toMatch(/unknown host/);
});

test("with a token, only the exact token opens the stream", () => {
  const access = new Access({ host: "0.0.0.0", token: TOKEN });
  const host = "192.168.1.20:4180";
  const refusal = (url: string) => access.streamRefusal(asks({ host, origin: `http://${host}` }, url));
  expect(refusal(`/stream?token=${TOKEN}`)).toBeNull();
  expect(refusal(`/stream?token=${TOKEN}x`)).toMatch(/token/);
  expect(refusal("/stream?token=")).toMatch(/token/);
  expect(refusal("/stream")).toMatch(/token/);
});
