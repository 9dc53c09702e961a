// Cases as the pages make them, and the short way through the API for tests that look at something later.

import { createHash } from "node:crypto";
import { type APIResponse, expect, type Locator, type Page } from "@playwright/test";
import { CaptureAnswerSchema, SignedPartsSchema, UploadAnswerSchema } from "@/lib/case/upload";
import { type CaseView, CaseViewSchema } from "@/lib/case/wire";
import type { TestFile } from "./captures";

/** A title of this run alone: a kept database may hold earlier ones. */
export function titled(word: string): string {
  return `${word} ${Date.now().toString(36)}`;
}

/** Calls the API with the session of the page, as its scripts would. */
export function call(page: Page, method: "GET" | "POST" | "PATCH" | "PUT" | "DELETE", path: string, data?: unknown) {
  const origin = process.env.FIRSTLOW_ADDRESS ?? "";
  return page.request.fetch(path, { method, data, headers: { origin }, maxRedirects: 0 });
}

async function done(answer: APIResponse): Promise<unknown> {
  expect(answer.ok(), `${answer.url()} answered ${answer.status()} ${await answer.text()}`).toBe(true);
  return answer.json();
}

/** A case with one capture, read by the server: uploading through the pages is tested elsewhere. */
export async function caseWith(page: Page, title: string, file: TestFile): Promise<CaseView> {
  const made = CaseViewSchema.parse(await done(await call(page, "POST", "/api/cases", { title })));
  const begun = { case: made.number, name: file.name, size: file.buffer.length };
  const { upload } = UploadAnswerSchema.parse(await done(await call(page, "POST", "/api/uploads", begun)));
  const sha256 = createHash("sha256").update(file.buffer).digest("hex");
  const asked = { parts: [{ number: 1, sha256 }] };
  const signed = SignedPartsSchema.parse(await done(await call(page, "POST", `/api/uploads/${upload.id}/parts`, asked)));
  const put = await fetch(signed.parts[0].url, { method: "PUT", body: new Uint8Array(file.buffer) });
  expect(put.status).toBe(200);
  const parts = [{ number: 1, etag: put.headers.get("etag") }];
  const kept = CaptureAnswerSchema.parse(await done(await call(page, "POST", `/api/uploads/${upload.id}/complete`, { parts })));
  await done(await call(page, "PUT", `/api/captures/${kept.capture.id}/reading`, {}));
  return readCase(page, made.number);
}

export async function readCase(page: Page, number: number): Promise<CaseView> {
  return CaseViewSchema.parse(await done(await call(page, "GET", `/api/cases/${number}`)));
}

/** Goes to a page and waits until its scripts answer: a file picked before that would be overlooked. */
export async function visit(page: Page, path: string): Promise<void> {
  await page.goto(path);
  // The server does not know the theme of the system; the name of this button says it once the page has come alive.
  await expect(page.getByRole("button", { name: /^Theme: (paper|night)/ })).toBeVisible();
}

/** Picks files on the intake page, opens them as one case, and answers its number. */
export async function openCase(page: Page, title: string, ...files: TestFile[]): Promise<number> {
  await visit(page, "/cases/new");
  await page.getByLabel("Capture files").setInputFiles(files);
  await page.getByLabel("Title of the case").fill(title);
  await page.getByRole("button", { name: "Open the case" }).click();
  await expect(page).toHaveURL(/\/cases\/\d+/);
  return Number(/\/cases\/(\d+)/.exec(page.url())?.[1]);
}

export function rows(page: Page): Locator {
  return page.getByRole("listbox", { name: "Transactions" }).getByRole("option");
}

/** The row of one transaction, by its number. */
export function row(page: Page, transaction: number): Locator {
  return page.locator(`#transaction-${transaction}`);
}

/** Notes, tags and the finding beside the trace. */
export function margin(page: Page): Locator {
  return page.getByRole("complementary", { name: "Beside the trace" });
}

/** Waits until what was uploaded is kept and its archive stands beside it: a reload shows it from there. */
export async function kept(page: Page, number: number): Promise<void> {
  await expect(async () => {
    const { captures } = await readCase(page, number);
    expect(captures.length).toBeGreaterThan(0);
    for (const capture of captures) expect(capture.archive_size, capture.name).not.toBeNull();
  }).toPass({ timeout: 30_000 });
}

/** Makes a link in the dialog that is open and answers its address. */
export async function makeLink(page: Page, label: string, more: { passphrase?: string; raw?: boolean } = {}): Promise<string> {
  const dialog = page.getByRole("dialog", { name: "Share this case" });
  await dialog.getByLabel(/^For whom/).fill(label);
  if (more.passphrase) await dialog.getByLabel(/^Passphrase/).fill(more.passphrase);
  if (more.raw) await dialog.getByLabel("the original file may be downloaded").check();
  await dialog.getByRole("button", { name: "Make a link" }).click();
  const link = dialog.getByLabel("The link, shown only now");
  await expect(link).toHaveValue(/\/shared\/.{22,}/);
  return link.inputValue();
}
