import { describe, expect, test } from "vitest";
import { demoCaptures } from "@/fixtures/demo/captures";

describe("demo captures", () => {
  const captures = demoCaptures();

  test("every capture has its own file name, a title and a body under four million bytes", () => {
    expect(new Set(captures.map((c) => c.file)).size).toBe(captures.length);
    for (const capture of captures) {
      expect(capture.title.length).toBeGreaterThan(8);
      expect(capture.bytes.length).toBeGreaterThan(10_000);
      expect(capture.bytes.length).toBeLessThan(4_000_000);
    }
  });

  test("the generator gives the same bytes every time", () => {
    const again = demoCaptures();
    captures.forEach((capture, i) => {
      expect(Buffer.compare(again[i].bytes, capture.bytes)).toBe(0);
    });
  });
});
