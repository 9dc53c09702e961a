import type { Page } from "@playwright/test";
import { expectAccessible } from "./support/axe";
import { signIn } from "./support/people";
import { expect, test } from "./support/test";

/** The demo case with contests, at its reading of them. */
async function openContests(page: Page): Promise<void> {
  await signIn(page, "engineer");
  await page.getByRole("link", { name: "Tank 4: valve write repeated now and then" }).click();
  await page.getByRole("tab", { name: /^Contests/ }).click();
  await expect(page.getByRole("heading", { name: /^Contest in [\d\s]+, drawn bit by bit$/ })).toBeVisible({ timeout: 30_000 });
}

test("a contest is drawn bit by bit, with the same as a table", async ({ page }) => {
  await openContests(page);
  await expect(page.getByText(/differs(:| is) a 0 against a 1\./)).toBeVisible();
  await expect(page.getByRole("region", { name: "Bit race" })).toContainText("wired AND");
  await page.getByText("the same as a table").click();
  const table = page.getByRole("table", { name: /Bits of the contest/ });
  // In the deciding row the one that kept the bus has 0, the other 1, and the bus shows 0.
  await expect(table.getByRole("row", { name: /^\d+ 0 1, yields 0$/ })).toBeVisible();
  await expectAccessible(page);
});

test("what if: the field says at which bit a message contradicts the bus, and what is wrong with it", async ({ page }) => {
  await openContests(page);
  const field = page.getByLabel(/^what if .+ had sent$/);
  await field.fill("0xA0 W");
  await expect(page.getByText(/0xA0 is above 0x7F. Is it the address byte of 0x50\?/)).toBeVisible();
  // All zeros beat every address that has a one, all ones lose to every address that has a zero.
  await field.fill("0x00 W");
  await expect(page.getByText(/it would have kept the bus from bit [0-6]/)).toBeVisible();
  await expect(page.getByText("what the bus would have shown")).toBeVisible();
  await field.fill("0x7F W");
  await expect(page.getByText(/it contradicts the bus at bit [0-6]/)).toBeVisible();
});

test("from the list to a race, and from the race to its row", async ({ page }) => {
  await openContests(page);
  const list = page.getByRole("region", { name: "Contests" }).getByRole("button");
  await expect(list.first()).toHaveAttribute("aria-pressed", "true");
  await list.nth(1).click();
  await expect(list.nth(1)).toHaveAttribute("aria-pressed", "true");
  await page.getByRole("button", { name: /^Transaction .+ in its row$/ }).click();
  await expect(page.getByRole("tab", { name: "Stack" })).toHaveAttribute("data-state", "active");
  await expect(page).toHaveURL(/transaction=\d+/);
});
