import type { Page, Request } from "@playwright/test";
import { busCsv } from "./support/captures";
import { kept, readCase, rows, visit } from "./support/casework";
import { account } from "./support/people";
import { expect, test } from "./support/test";

/** Everything the page sends: what is not a plain fetch of the application's own files is a request to look at. */
function listen(page: Page): Request[] {
  const sent: Request[] = [];
  page.on("request", (request) => {
    const elsewhere = new URL(request.url()).origin !== process.env.FIRSTLOW_ADDRESS && !/^(blob|data):/.test(request.url());
    if (elsewhere || request.method() !== "GET" || request.postDataBuffer() !== null) sent.push(request);
  });
  return sent;
}

test("without an account a file and the sample are read, and nothing leaves the browser until it is kept", async ({ page }) => {
  test.slow();
  const sent = listen(page);
  const file = busCsv("bench-export.csv");
  await visit(page, "/");
  await page.getByRole("button", { name: "or try a sample" }).click();
  await expect(page.getByRole("heading", { name: "Valve write repeated now and then" })).toBeVisible();
  await expect(page.getByText(/was contested: Pump controller and Gateway both started/)).toBeVisible();
  await page.getByRole("button", { name: "another capture" }).click();

  await page.getByLabel("pick a file").setInputFiles(file);
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  await page.getByRole("button", { name: "yes, as read" }).click();
  await page.getByRole("button", { name: /^no answer/ }).click();
  await expect(rows(page)).toHaveCount(3);
  await page.getByRole("tab", { name: /^Limits/ }).click();
  await expect(page.getByRole("cell", { name: "tHD;STA" }).or(page.getByRole("rowheader", { name: "tHD;STA" }))).toBeVisible();
  expect(sent.map((request) => `${request.method()} ${request.url()}`)).toEqual([]);

  const { email, password } = account("technician");
  await page.getByRole("button", { name: "sign in to keep it" }).click();
  await page.getByLabel("E-mail").fill(email);
  await page.getByLabel("Password").fill(password);
  await page.getByRole("button", { name: "Sign in" }).click();
  await expect(page).toHaveURL(/\/cases\/new$/);
  await expect(page.getByRole("region", { name: "bench-export.csv" })).toContainText("A CSV with 2 usable channels");
  // Signing in sent a form, not the file.
  const piece = file.buffer.subarray(0, 60);
  expect(sent.every((request) => !request.postDataBuffer()?.includes(piece))).toBe(true);
  await page.getByRole("button", { name: "Open the case" }).click();
  await expect(page).toHaveURL(/\/cases\/\d+/);
  const number = Number(/\/cases\/(\d+)/.exec(page.url())?.[1]);
  await kept(page, number);
  const view = await readCase(page, number);
  expect([view.title, view.captures[0].size]).toEqual(["bench export", file.buffer.length]);
});
