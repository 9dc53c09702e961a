import type { Page } from "@playwright/test";
import { expectAccessible } from "./support/axe";
import { busCsv, motorCsv } from "./support/captures";
import { caseWith, makeLink, margin, readCase, row, rows, titled, visit } from "./support/casework";
import { account, signIn, stranger } from "./support/people";
import { expect, test } from "./support/test";

/** Accessible in both themes. */
async function expectBothThemes(page: Page): Promise<void> {
  for (const theme of ["paper", "night"]) {
    await page.evaluate((name) => {
      document.documentElement.dataset.theme = name;
    }, theme);
    await expectAccessible(page);
  }
}

test("case, intake, dialogs and share are accessible in both themes", async ({ page, browser }) => {
  test.slow();
  await signIn(page, "lead");
  await visit(page, "/cases/new");
  await page.getByLabel("Capture files").setInputFiles([busCsv("fine.csv"), motorCsv("motor.csv")]);
  await expect(page.getByRole("region", { name: "fine.csv" })).toContainText("A CSV with 2 usable channels");
  await expect(page.getByRole("region", { name: "motor.csv" })).toContainText("No two lines");
  await expectBothThemes(page);

  const made = await caseWith(page, titled("For every eye"), busCsv("tank-oxygen.csv"));
  await page.goto(`/cases/${made.number}?transaction=6`);
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  for (const reading of ["Stack", "Strip", "Limits", "Faults"]) {
    await page.getByRole("tab", { name: new RegExp(`^${reading}`) }).click();
    await expect(page.getByRole("tab", { name: new RegExp(`^${reading}`) })).toHaveAttribute("aria-selected", "true");
    await expectBothThemes(page);
  }
  await page.getByRole("tab", { name: "Stack" }).click();
  await page.keyboard.press("?");
  await expect(page.getByRole("dialog")).toBeVisible();
  await expectBothThemes(page);
  await page.keyboard.press("Escape");
  await page.getByRole("button", { name: "Share", exact: true }).click();
  const link = await makeLink(page, "For every eye");
  await expectBothThemes(page);

  const context = await stranger(browser);
  const guest = await context.newPage();
  await guest.goto(link);
  await expect(rows(guest)).not.toHaveCount(0);
  await expectBothThemes(guest);
  await context.close();
});

test("a case is worked on with the keyboard alone", async ({ page }) => {
  test.slow();
  const { email, password } = account("engineer");
  await page.goto("/sign-in");
  await page.getByLabel("E-mail").focus();
  await page.keyboard.type(email);
  await page.keyboard.press("Tab");
  await page.keyboard.type(password);
  await page.keyboard.press("Enter");
  await expect(page).toHaveURL(/\/cases/);
  await tabTo(page, "link", "Open a capture");
  await page.keyboard.press("Enter");
  await expect(page).toHaveURL(/\/cases\/new$/);
  await tabTo(page, "button", "Pick files");
  const choosing = page.waitForEvent("filechooser");
  await page.keyboard.press("Enter");
  await (await choosing).setFiles(busCsv("keys-only.csv"));
  await expect(page.getByRole("region", { name: "keys-only.csv" })).toContainText("begins");
  await tabTo(page, "button", "Open the case");
  await page.keyboard.press("Enter");
  await expect(page).toHaveURL(/\/cases\/\d+/);
  const number = Number(/\/cases\/(\d+)/.exec(page.url())?.[1]);
  await tabTo(page, "button", "yes, as read");
  await page.keyboard.press("Enter");
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  await expect(margin(page).getByRole("button", { name: "write it" })).toBeVisible();

  await page.keyboard.press("j");
  await expect(row(page, 0)).toHaveAttribute("aria-selected", "true");
  await tabTo(page, "listbox", "Transactions");
  await page.keyboard.press("End");
  await expect(row(page, 20)).toHaveAttribute("aria-selected", "true");
  await page.keyboard.press("ArrowUp");
  await expect(row(page, 19)).toHaveAttribute("aria-selected", "true");
  await page.keyboard.press("p");
  await expect(row(page, 13)).toHaveAttribute("aria-selected", "true");
  await page.keyboard.press("t");
  await page.keyboard.press("Tab");
  await page.keyboard.press("Enter");
  await expect(row(page, 13)).toContainText("not acknowledged");
  await expect(row(page, 14)).toHaveAttribute("aria-selected", "true");
  await page.keyboard.press("c");
  await page.keyboard.type("written without a mouse");
  await page.keyboard.press("Control+Enter");
  await expect(row(page, 14).locator("sup")).toHaveText("1");
  await page.keyboard.press("/");
  await page.keyboard.type("12 4F");
  await page.keyboard.press("Enter");
  await expect(rows(page)).toHaveCount(5);
  await page.keyboard.press("s");
  await expect(page.getByRole("tab", { name: "Strip" })).toHaveAttribute("aria-selected", "true");
  await page.keyboard.press("s");
  await page.keyboard.press("?");
  await expect(page.getByRole("dialog")).toContainText("next and previous fault");
  await page.keyboard.press("Escape");
  await expect(page.getByRole("dialog")).toHaveCount(0);
  const view = await readCase(page, number);
  expect([view.notes.length, view.tags.length]).toEqual([1, 1]);
});

/** Tabs on until the focus stands where it should; fails when the page has no such stop. */
async function tabTo(page: Page, role: "button" | "link" | "listbox", name: string): Promise<void> {
  const target = page.getByRole(role, { name, exact: true });
  await expect(target).toBeEnabled();
  for (let stops = 0; stops < 80; stops++) {
    if (await target.evaluate((element) => element === document.activeElement)) return;
    await page.keyboard.press("Tab");
  }
  throw new Error(`Eighty stops of Tab do not reach the ${role} "${name}".`);
}

test("at 390 pixels no page is wider than the window, and the margin comes up", async ({ page }) => {
  test.slow();
  await page.setViewportSize({ width: 390, height: 844 });
  const fits = async () => {
    const width = await page.evaluate(() => document.documentElement.scrollWidth);
    expect(width, page.url()).toBeLessThanOrEqual(390);
  };
  await visit(page, "/");
  await fits();
  await page.getByRole("button", { name: "or try a sample" }).click();
  await expect(rows(page)).not.toHaveCount(0);
  await fits();
  await signIn(page, "engineer");
  await fits();
  await visit(page, "/cases/new");
  await page
    .getByLabel("Capture files")
    .setInputFiles([busCsv("fine.csv"), motorCsv("a-rather-long-name-of-an-export-2026-03-14.csv")]);
  await expect(page.getByRole("region", { name: "fine.csv" })).toContainText("begins");
  await fits();
  const made = await caseWith(page, titled("Narrow"), busCsv("tank-oxygen.csv"));
  await page.goto(`/cases/${made.number}?transaction=6`);
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  for (const reading of ["Stack", "Strip", "Limits", "Faults"]) {
    await page.getByRole("tab", { name: new RegExp(`^${reading}`) }).click();
    await fits();
  }
  await page.getByRole("button", { name: /^Transaction 6/ }).click();
  const sheet = page.getByRole("dialog", { name: "Beside the trace" });
  await expect(sheet).toContainText("Tags on 6");
  await sheet.getByRole("button", { name: /^not acknowledged/ }).click();
  await expect.poll(async () => (await readCase(page, made.number)).tags.length).toBe(1);
});
