import type { Page } from "@playwright/test";
import { expectAccessible } from "./support/axe";
import { signIn } from "./support/people";
import { expect, test } from "./support/test";

async function openCase(page: Page, title: string): Promise<void> {
  await signIn(page, "engineer");
  await page.getByRole("link", { name: title }).click();
  await expect(page.getByRole("tab", { name: /^Faults/ })).toBeVisible({ timeout: 30_000 });
}

test("a case is judged by the limits that are chosen, and back", async ({ page }) => {
  await openCase(page, "Tank 3: overnight reference");
  const choose = async (option: string) => {
    await page.getByRole("button", { name: "Limits and roster" }).click();
    await page.getByRole("dialog").getByLabel("Limits", { exact: true }).selectOption({ label: option });
    await page.getByRole("button", { name: "Judge it so" }).click();
    await expect(page.getByRole("dialog")).toHaveCount(0, { timeout: 30_000 });
  };
  await page.getByRole("button", { name: "Limits and roster" }).click();
  await expect(page.getByLabel("Roster")).toHaveValue(/[0-9a-f-]{36}/);
  await page.getByLabel("Bus capacitance for High-speed, pF").fill("4000");
  await expect(page.getByText("× from 100 to 400 pF")).toBeVisible();
  await expectAccessible(page);
  await page.keyboard.press("Escape");
  await choose("Fast-mode Plus");
  await expect(page.getByText(/judged by/)).toContainText("Fast-mode Plus");
  await choose("slowest mode that the measured SCL fits");
  await expect(page.getByText(/judged by/)).not.toContainText("Plus");
});

test("a controller log is understood before it is kept, and can be taken off again", async ({ page }) => {
  await openCase(page, "Tank 3: overnight reference");
  await page.getByRole("button", { name: "Attach a log" }).click();
  const lines = page.getByLabel("Or its lines");
  await lines.fill("12.5 gateway: transfer failed: EAGAIN\nlater gateway: arbitration lost");
  await expect(page.getByText(/Line 2 of the log: .+ does not begin with a time/)).toBeVisible();
  await lines.fill("12.5 gateway: transfer failed: EAGAIN\n12.75 gateway: done");
  await expect(
    page.getByText(/2 lines are understood, over 250.ms\. It speaks for gateway\. 1 reports lost arbitration\./),
  ).toBeVisible();
  await expectAccessible(page);
  await page.getByRole("button", { name: "Judge with it" }).click();
  await expect(page.getByRole("dialog")).toHaveCount(0, { timeout: 30_000 });
  await page.getByRole("button", { name: "Log", exact: true }).click();
  await expect(page.getByLabel("Or its lines")).toHaveValue(/EAGAIN/);
  await page.getByRole("button", { name: "Remove the log" }).click();
  await expect(page.getByRole("button", { name: "Attach a log" })).toBeVisible({ timeout: 30_000 });
});
