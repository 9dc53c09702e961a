import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import { crc8, pec } from "@/lib/limits/pec";

interface Vector {
  bytes: string;
  pec: string;
  source?: string;
  status: string;
}
const facts = JSON.parse(readFileSync(new URL("../../fixtures/published/i2c-limits.json", import.meta.url), "utf8"));
const published: Vector[] = facts.pec.vectors.filter((vector: Vector) => vector.status === "VERIFIED");
const bytesOf = (text: string) => text.split(" ").map((byte) => Number.parseInt(byte, 16));

test("there are eight published vectors", () => {
  expect(published).toHaveLength(8);
});

// Sources stand beside each vector: CRC catalogue (F4), wazo.community (5F of "abc"), Melexis MLX90614 data sheet (30, 48),
// Melexis note 390119061402 (6F), docs.rs smbus-pec (5F, 66), TI SLUA475 message 11 (D8).
test.each(published)("PEC of $bytes is $pec ($source)", ({ bytes, pec: expected }) => {
  expect(pec(bytesOf(bytes))).toBe(Number.parseInt(expected, 16));
});

test.each(published)("a message with its PEC leaves nothing: $bytes", ({ bytes, pec: expected }) => {
  expect(crc8(pec(bytesOf(bytes)), Number.parseInt(expected, 16))).toBe(0);
});

test("one changed bit anywhere in a message changes its PEC", () => {
  const message = bytesOf("B4 07 B5 D2 3A");
  for (let i = 0; i < message.length; i++) {
    for (let bit = 0; bit < 8; bit++) expect(pec(message.map((byte, k) => (k === i ? byte ^ (1 << bit) : byte)))).not.toBe(0x30);
  }
});
