import fc from "fast-check";
import { expect, test } from "vitest";
import { RateLimit, readClientMessage } from "../../bridge/serve/client-messages.ts";

const read = (text: string) => readClientMessage(Buffer.from(text), false);

test("a mark is read, its text trimmed", () => {
  expect(read('{"type":"add mark","text":"  new pitch setting "}')).toEqual({
    type: "add mark",
    text: "new pitch setting",
  });
});

test.each([
  ["not JSON", "{"],
  ["unknown type", '{"type":"erase everything"}'],
  ["unknown key", '{"type":"add mark","text":"a","path":"../x"}'],
  ["empty text", '{"type":"add mark","text":"   "}'],
  ["text too long", JSON.stringify({ type: "add mark", text: "x".repeat(201) })],
  ["no object", "null"],
])("refused with a reason: %s", (_title, text) => {
  expect(typeof read(text)).toBe("string");
});

test("binary and oversize messages are refused", () => {
  expect(readClientMessage(Buffer.from("{}"), true)).toMatch(/binary/);
  expect(readClientMessage(Buffer.alloc(5000, 0x20), false)).toMatch(/longer/);
});

test("no bytes whatever make it throw, and nothing but a well-formed mark passes", () => {
  fc.assert(
    fc.property(fc.uint8Array({ maxLength: 300 }), (bytes) => {
      expect(typeof readClientMessage(Buffer.from(bytes), false)).toBe("string");
    }),
  );
});

test("the rate limit lets a burst through, then the steady rate, and forgives after a pause", () => {
  const limit = new RateLimit(10);
  let passed = 0;
  for (let i = 0; i < 100; i++) if (limit.allows(0)) passed++;
  expect(passed).toBe(20);
  for (let ms = 100; ms <= 1000; ms += 10) if (limit.allows(ms)) passed++;
  // Ten more were earned; the last tenth may be lost to rounding.
  expect(passed).toBeGreaterThanOrEqual(29);
  expect(passed).toBeLessThanOrEqual(30);
  expect(limit.allows(10_000)).toBe(true);
});
