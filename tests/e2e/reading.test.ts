import { busCsv, longCsv, motorCsv } from "./support/captures";
import { rows, visit } from "./support/casework";
import { expect, test } from "./support/test";

// What becomes of a reading that does not come to its end, on the front door and without an account.

test("a reading that is stopped keeps what it has read and tells nothing more, and can be begun again", async ({ page }) => {
  test.slow();
  await visit(page, "/");
  await page.getByLabel("pick a file").setInputFiles(longCsv("long.csv"));
  await page.getByRole("button", { name: "stop" }).click();
  await expect(page.getByText("Reading was stopped")).toBeVisible();
  await page.waitForTimeout(500);
  await expect(page.getByText("Reading was stopped")).toBeVisible();
  await page.getByRole("button", { name: "read it again" }).click();
  await expect(page.getByText("the bus carried 7 transactions")).toBeVisible();
  await expect(page.getByText("Reading was stopped")).toHaveCount(0);
});

test("a file that is no bus is refused beside what it looks like, and the next one is read", async ({ page }) => {
  await visit(page, "/");
  await page.getByLabel("pick a file").setInputFiles(motorCsv("motor.csv"));
  await expect(page.getByText(/No two lines/)).toBeVisible();
  await expect(page.getByRole("combobox").first()).toBeVisible();
  await page.getByRole("button", { name: "another capture" }).click();
  await page.getByLabel("pick a file").setInputFiles(busCsv("fine.csv"));
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  await expect(rows(page)).not.toHaveCount(0);
});

test("lines read the wrong way round are swapped, and read anew", async ({ page }) => {
  await visit(page, "/");
  await page.getByLabel("pick a file").setInputFiles(busCsv("swapped.csv", "Time [s],SDA,SCL"));
  const asRead = page.getByText(/^As read: SCL is/);
  const before = (await asRead.textContent()) ?? "";
  await page.getByRole("button", { name: "swap them" }).click();
  await expect(asRead).not.toHaveText(before);
  await expect(page.getByRole("button", { name: "stop" })).toHaveCount(0);
});

test("a decoder that cannot be loaded is told as our fault, whether it was to wait ready or not", async ({
  page,
  complaints,
}) => {
  complaints.expectComplaint(/worker|ERR_FAILED|Failed to load/i);
  await page.route(/turbopack-worker/, (route) => route.abort());
  await visit(page, "/");
  // Time for the decoder that should wait ready to fail, so that the file starts its own.
  await page.waitForTimeout(1500);
  await page.getByLabel("pick a file").setInputFiles(busCsv("fine.csv"));
  await expect(page.getByText("The decoder failed. This is our fault, not your file's.")).toBeVisible();
  await page.unroute(/turbopack-worker/);
  await page.getByRole("button", { name: "try again" }).click();
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
});
