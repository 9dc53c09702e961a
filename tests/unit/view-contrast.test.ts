import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";

// WCAG 2.2, 1.4.3 (text 4.5:1) and 1.4.11 (controls and graphics 3:1); relative luminance as WCAG defines it.

const css = readFileSync(new URL("../../app/globals.css", import.meta.url), "utf8");

function block(opening: string): Map<string, readonly number[]> {
  const start = css.indexOf(opening);
  if (start < 0) throw new Error(`no block "${opening}" in globals.css`);
  const body = css.slice(start + opening.length, css.indexOf("}", start));
  const tokens = new Map<string, readonly number[]>();
  for (const [, name, value] of body.matchAll(/--([a-z]+):\s*([\d ]+);/g)) tokens.set(name, value.split(" ").map(Number));
  return tokens;
}

function luminance(rgb: readonly number[]): number {
  const [r, g, b] = rgb.map((byte) => {
    const share = byte / 255;
    return share <= 0.04045 ? share / 12.92 : ((share + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * r + 0.7152 * g + 0.0722 * b;
}

function contrast(one: readonly number[], other: readonly number[]): number {
  const [light, dark] = [luminance(one), luminance(other)].sort((a, b) => b - a);
  return (light + 0.05) / (dark + 0.05);
}

const themes = {
  paper: block(":root {"),
  night: block(':root[data-theme="night"] {'),
  "night by system preference": block(":root:not([data-theme]) {"),
  print: block(':root[data-theme="night"],\n  :root:not([data-theme]) {'),
};

describe("the formula", () => {
  it("gives 21:1 for black on white (WCAG 2.2, definition of contrast ratio)", () => {
    expect(contrast([0, 0, 0], [255, 255, 255])).toBeCloseTo(21, 6);
  });
});

describe.each(Object.entries(themes))("%s", (_name, tokens) => {
  const token = (name: string) => {
    const rgb = tokens.get(name);
    if (rgb?.length !== 3) throw new Error(`token ${name} is missing`);
    return rgb;
  };

  it.each(["ink", "quiet", "accent", "broken", "contest"])("%s reads as text on paper", (name) => {
    expect(contrast(token(name), token("paper"))).toBeGreaterThanOrEqual(4.5);
  });

  it("field edges are seen on paper", () => {
    expect(contrast(token("field"), token("paper"))).toBeGreaterThanOrEqual(3);
  });

  it("paper reads as text on ink", () => {
    expect(contrast(token("paper"), token("ink"))).toBeGreaterThanOrEqual(4.5);
  });
});

it("both nights are the same", () => {
  expect([...themes["night by system preference"]]).toEqual([...themes.night]);
});
