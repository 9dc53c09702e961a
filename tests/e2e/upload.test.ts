import type { Page } from "@playwright/test";
import { busCsv, busVcd, longCsv, motorCsv, savedPage, type TestFile } from "./support/captures";
import { call, kept, openCase, readCase, rows, titled, visit } from "./support/casework";
import { signIn } from "./support/people";
import { calmStorage, planFault, storageRequests } from "./support/storage";
import { expect, test } from "./support/test";

test.beforeEach(calmStorage);
test.afterEach(calmStorage);

/** Answers of the storage to PUTs of one part, in order. */
async function puts(part: number): Promise<readonly (number | undefined)[]> {
  const seen = await storageRequests();
  return seen.filter((request) => request.method === "PUT" && request.part === part).map(({ status }) => status);
}

/** A part that is on its way for longer than any test lasts. */
function stall(part: number): Promise<void> {
  return planFault({ method: "PUT", part, delay: 120_000 });
}

function line(page: Page, file: TestFile) {
  return page.getByRole("region", { name: `Upload of ${file.name}` });
}

test("an upload outlives a broken line, pauses and goes on; the file is read meanwhile", async ({ page, complaints }) => {
  test.slow();
  complaints.expectComplaint(process.env.S3_ENDPOINT ?? "");
  await signIn(page, "technician");
  const file = longCsv(`${titled("every sample")}.csv`);
  await planFault({ method: "PUT", part: 2, cutAfter: 200_000, times: 1000 });
  const number = await openCase(page, titled("Broken line"), file);
  await expect(line(page, file)).toContainText("waiting for the connection");
  await expect(line(page, file)).toContainText("What has arrived is kept");
  await expect(rows(page)).toHaveCount(7);
  await expect.poll(() => puts(1)).toEqual([200]);
  await calmStorage();
  await stall(2);
  await expect.poll(() => puts(2), { timeout: 30_000 }).toHaveLength(1);
  await line(page, file).getByRole("button", { name: "Pause" }).click();
  await expect(line(page, file)).toContainText("paused");
  expect((await readCase(page, number)).captures).toEqual([]);
  await line(page, file).getByRole("button", { name: "Go on" }).click();
  await expect(line(page, file)).toHaveCount(0);
  await kept(page, number);
  // What had arrived was not sent again.
  expect(await puts(1)).toEqual([]);
  expect((await puts(2)).at(-1)).toBe(200);
  const [capture] = (await readCase(page, number)).captures;
  expect(capture.size).toBe(file.buffer.length);
});

test("after a reload the same file, picked again, goes on where it stopped", async ({ page, complaints }) => {
  test.slow();
  complaints.expectComplaint(process.env.S3_ENDPOINT ?? "");
  await signIn(page, "engineer");
  const file = longCsv(`${titled("overnight")}.csv`);
  await stall(2);
  const number = await openCase(page, titled("Reload"), file);
  await expect.poll(() => puts(1)).toEqual([200]);
  await expect.poll(() => puts(2)).toHaveLength(1);
  await page.reload();
  await expect(page.getByText("This case holds no capture.")).toBeVisible();

  await visit(page, "/cases/new");
  await expect(
    page.getByText(`${file.name}, ${(file.buffer.length / 1e6).toFixed(1)} MB, for case ${number}: 50 %`),
  ).toBeVisible();
  await page.getByLabel("Capture files").setInputFiles(file);
  await expect(page).toHaveURL(new RegExp(`/cases/${number}$`));
  await kept(page, number);
  expect(await puts(1)).toEqual([200]);
  await visit(page, "/cases/new");
  await expect(page.getByRole("heading", { name: "Open a capture" })).toBeVisible();
  await expect(page.getByText("Uploads that did not finish")).toHaveCount(0);
});

test("a cancelled upload leaves nothing behind", async ({ page, complaints }) => {
  complaints.expectComplaint(process.env.S3_ENDPOINT ?? "");
  await signIn(page, "technician");
  const file = busCsv("mistaken.csv");
  await stall(1);
  const number = await openCase(page, titled("Cancelled"), file);
  await expect.poll(() => puts(1)).toHaveLength(1);
  await line(page, file).getByRole("button", { name: "Cancel" }).click();
  await expect(page.getByText("This case holds no capture.")).toBeVisible();
  await expect.poll(async () => (await storageRequests()).some(({ method }) => method === "DELETE")).toBe(true);
  expect((await readCase(page, number)).captures).toEqual([]);
  const { uploads } = await (await call(page, "GET", "/api/uploads")).json();
  expect(uploads.filter((upload: { case: number; state: string }) => upload.case === number && upload.state === "open")).toEqual(
    [],
  );
});

test("files that are no capture are refused with what they are, and nothing is stored", async ({ page, complaints }) => {
  complaints.expectComplaint("/complete");
  await signIn(page, "engineer");
  await visit(page, "/cases/new");
  await page.getByLabel("Capture files").setInputFiles([savedPage("export.csv"), motorCsv("motor.csv")]);
  const web = page.getByRole("region", { name: "export.csv" });
  await expect(web).toContainText("export.csv is a web page, not a capture");
  await expect(web).toContainText("Download it again.");
  const motor = page.getByRole("region", { name: "motor.csv" });
  await expect(motor).toContainText("No two lines of this file behave as SCL and SDA");
  await expect(page.getByRole("button", { name: "Open the case" })).toBeDisabled();
  await web.getByRole("button", { name: "Leave out" }).click();
  await expect(web).toHaveCount(0);
  expect(await storageRequests()).toEqual([]);

  // The server looks for itself: a program that sends the web page is refused too, and storage is emptied again.
  const number = await openCase(page, titled("Refused"), busCsv("fine.csv"));
  await kept(page, number);
  await calmStorage();
  const bytes = savedPage("export.csv").buffer;
  const told = await page.evaluate(
    async ({ inCase, text }) => {
      const ask = async (path: string, body: unknown) => {
        const headers = { "content-type": "application/json" };
        const answer = await fetch(path, { method: "POST", body: JSON.stringify(body), headers });
        return { status: answer.status, body: await answer.json() };
      };
      const blob = new Blob([text]);
      const digest = await crypto.subtle.digest("SHA-256", await blob.arrayBuffer());
      const sha256 = [...new Uint8Array(digest)].map((byte) => byte.toString(16).padStart(2, "0")).join("");
      const { upload } = (await ask("/api/uploads", { case: inCase, name: "export.csv", size: blob.size })).body;
      const signed = (await ask(`/api/uploads/${upload.id}/parts`, { parts: [{ number: 1, sha256 }] })).body;
      const put = await fetch(signed.parts[0].url, { method: "PUT", body: blob });
      const parts = [{ number: 1, etag: put.headers.get("etag") }];
      return ask(`/api/uploads/${upload.id}/complete`, { parts });
    },
    { inCase: number, text: bytes.toString() },
  );
  expect(told.status).toBe(415);
  expect(told.body.title).toContain("is a web page, not a capture");
  expect((await readCase(page, number)).captures).toHaveLength(1);
  expect((await storageRequests()).some(({ method }) => method === "DELETE")).toBe(true);
});

test("a file that has arrived before the page of its case stands is kept all the same", async ({ page }) => {
  await signIn(page, "technician");
  await visit(page, "/cases/new");
  await page.getByLabel("Capture files").setInputFiles(busCsv("quick.csv"));
  // The server draws the page of the case at once, and the answer is held back until the upload is complete.
  const arrived = page.waitForResponse(/\/complete$/);
  await page.route(/\/cases\/\d+(\?|$)/, async (route) => {
    const drawn = await route.fetch();
    await arrived;
    await route.fulfill({ response: drawn });
  });
  await page.getByLabel("Title of the case").fill(titled("Quick"));
  await page.getByRole("button", { name: "Open the case" }).click();
  await expect(page).toHaveURL(/\/cases\/\d+/);
  await kept(page, Number(/\/cases\/(\d+)/.exec(page.url())?.[1]));
});

test("a case takes further captures, and a file that asks is answered before it is sent", async ({ page }) => {
  test.slow();
  await signIn(page, "technician");
  const number = await openCase(page, titled("Two ends"), busCsv("near-end.csv"));
  await kept(page, number);
  await page.getByRole("button", { name: "Add a capture" }).click();
  const dialog = page.getByRole("dialog", { name: "Add a capture to this case" });
  await dialog
    .getByLabel("Capture files")
    .setInputFiles([motorCsv("motor.csv"), longCsv("far-end.csv"), busVcd("at-the-gateway.vcd")]);
  const motor = dialog.getByRole("region", { name: "motor.csv" });
  await expect(motor).toContainText("No two lines of this file behave as SCL and SDA");
  await motor.getByLabel("SCL").selectOption("@2");
  await motor.getByLabel("SDA").selectOption("@3");
  await motor.getByRole("button", { name: "read it again" }).click();
  await expect(motor).toContainText("A CSV with 3 usable channels.");
  await motor.getByRole("button", { name: "Leave out" }).click();
  await dialog.getByRole("button", { name: "Add to the case" }).click();
  const captures = page.getByRole("navigation", { name: "Captures of this case" });
  await expect(captures.getByRole("button", { name: "far-end.csv" })).toHaveAttribute("aria-pressed", "true");
  await expect(page).toHaveURL(/[?&]capture=2/);
  // Numbered as they were picked, however much longer the first of them is on its way.
  const names = async () => (await readCase(page, number)).captures.map(({ name }) => name);
  await expect.poll(names, { timeout: 60_000 }).toEqual(["near-end.csv", "far-end.csv", "at-the-gateway.vcd"]);
  await kept(page, number);
  await page.reload();
  await expect(captures.getByRole("button", { name: "far-end.csv" })).toHaveAttribute("aria-pressed", "true");
});
