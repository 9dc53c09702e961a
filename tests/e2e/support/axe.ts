// WCAG 2.2 A and AA, as far as a program can judge them, on the page as it stands.

import { AxeBuilder } from "@axe-core/playwright";
import { expect, type Page } from "@playwright/test";

const RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"];

export async function expectAccessible(page: Page): Promise<void> {
  const { violations } = await new AxeBuilder({ page }).withTags(RULES).analyze();
  const found = violations.map(({ id, help, nodes }) => `${id}: ${help}\n  ${nodes.map((node) => node.html).join("\n  ")}`);
  expect(found, "accessibility violations").toEqual([]);
}
