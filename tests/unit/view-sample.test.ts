import { readFileSync } from "node:fs";
import { gunzipSync } from "node:zlib";
import { expect, it } from "vitest";
import { SAMPLE_NAME } from "@/components/bench/sample";
import { demoCaptures } from "@/fixtures/demo/captures";

it("the front door's sample is the demo capture that its name says", () => {
  const stored = gunzipSync(readFileSync(new URL("../../components/bench/sample.csv.gz", import.meta.url)));
  const demo = demoCaptures().find((capture) => `${capture.file}.gz` === SAMPLE_NAME);
  expect(demo).toBeDefined();
  expect(Buffer.compare(stored, Buffer.from(demo?.bytes ?? []))).toBe(0);
});
