import { execFile } from "node:child_process";
import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import path from "node:path";
import { promisify } from "node:util";
import type { Page } from "@playwright/test";
import { type Report, ReportSchema } from "@/lib/diagnosis/report";
import { expectAccessible } from "./support/axe";
import { hurriedVolts } from "./support/captures";
import { caseWith, titled, visit } from "./support/casework";
import { signIn } from "./support/people";
import { expect, test } from "./support/test";

// One capture; what the page, the command, the stations' API and the download say of it are the same figures.

async function printed(name: string, bytes: Buffer, ...options: string[]): Promise<string> {
  const folder = await mkdtemp(path.join(tmpdir(), "firstlow-figures-"));
  try {
    const file = path.join(folder, name);
    await writeFile(file, bytes);
    const command = ["--import", "tsx", "workers/decode.command.ts", file, ...options];
    // Something fails its limit, which the exit code says too.
    const done = promisify(execFile)(process.execPath, command, { maxBuffer: 1 << 26 });
    return (await done.catch((failed: { stdout: string }) => failed)).stdout;
  } finally {
    await rm(folder, { recursive: true });
  }
}

interface Figures {
  readonly parameter: string;
  readonly count: string;
  readonly least: string;
  readonly median: string;
  readonly most: string;
  readonly limit: string;
}

const plain = (text: string) => text.replace(/\u00a0/g, " ").trim();

/** The rows of the page's table, the way the command would print them. */
async function onPage(page: Page): Promise<Figures[]> {
  const table = page.getByRole("region", { name: /^Measured against/ }).getByRole("table");
  const rows = await table.locator("tbody tr").all();
  const texts = await Promise.all(rows.map((row) => row.locator("th, td").allTextContents()));
  return texts.map((cells) => {
    const [parameter, count, least, median, most, limit] = cells.map(plain);
    const bound = limit === "none" ? "" : limit.replaceAll("at least", ">=").replaceAll("at most", "<=");
    const dash = (text: string) => (text === "–" ? "-" : text);
    return {
      parameter: parameter.replace("1/", ""),
      count: count.replaceAll(" ", ""),
      least: dash(least),
      median: dash(median),
      most: dash(most),
      limit: bound,
    };
  });
}

/** The rows of the command's table. */
function inText(text: string): Figures[] {
  const lines = text.split("\n");
  const from = lines.findIndex((line) => line.startsWith("Measurements against"));
  const rows = lines.slice(from + 2, lines.indexOf("", from + 2)).filter((line) => /^ {2}\S+ +\d+ {2}/.test(line));
  return rows.map((line) => {
    const [parameter, count, least, median, most, ...rest] = line.trim().split(/ {2,}/);
    return { parameter, count, least, median, most, limit: rest.find((cell) => /^[<>]=/.test(cell)) ?? "" };
  });
}

/** A written time stands for the number: half a unit of its last digit. */
function says(text: string, seconds: number | null): boolean {
  if (seconds === null) return text === "-";
  const [digits, unit] = text.split(" ");
  const scale = { s: 1, ms: 1e-3, µs: 1e-6, ns: 1e-9 }[unit] ?? Number.NaN;
  const places = digits.split(".")[1]?.length ?? 0;
  // A whole number of four digits may have lost its zeros to rounding.
  return Math.abs(Number(digits) * scale - seconds) <= (places === 0 ? 0.5 : 0.51 * 10 ** -places) * scale;
}

test("page, command, API and download give the same figures", async ({ page }) => {
  test.slow();
  await signIn(page, "engineer");
  const file = hurriedVolts("hurried.csv");
  const view = await caseWith(page, titled("Hurried clock"), file);
  const [capture] = view.captures;
  const json = await printed(file.name, file.buffer, "--json");
  const text = await printed(file.name, file.buffer);
  const report: Report = ReportSchema.parse(JSON.parse(json));
  expect(report).toMatchObject({ verdict: "fail", capture: { levels: "volts" } });

  await visit(page, `/cases/${view.number}`);
  await expect(page.getByRole("tab", { name: /^Faults/ })).toBeVisible({ timeout: 30_000 });
  const [download] = await Promise.all([
    page.waitForEvent("download"),
    page
      .getByRole("link", { name: /report/i })
      .first()
      .click(),
  ]);
  const exported = await download.createReadStream().then(async (stream) => Buffer.concat(await stream.toArray()).toString());
  const answer = await page.request.get(`/api/captures/${capture.id}/report`);
  expect(await answer.text()).toBe(json);
  expect(exported).toBe(json);
  expect(capture.summary).toMatchObject({ verdict: report.verdict, measurements: report.measurements, levels: report.levels });

  await page.getByRole("tab", { name: /^Limits/ }).click();
  const shown = (await onPage(page)).sort((a, b) => a.parameter.localeCompare(b.parameter));
  const written = inText(text).sort((a, b) => a.parameter.localeCompare(b.parameter));
  expect(shown.length).toBe(report.measurements.length);
  expect(shown).toEqual(written);
  for (const row of report.measurements) {
    const figures = shown.find((one) => one.parameter === row.parameter);
    expect(figures?.count).toBe(String(row.count));
    expect([row.parameter, says(figures?.least ?? "", row.min_s), says(figures?.median ?? "", row.p50_s)]).toEqual([
      row.parameter,
      true,
      true,
    ]);
    expect([row.parameter, says(figures?.most ?? "", row.max_s)]).toEqual([row.parameter, true]);
  }
  for (const sentence of report.lede ?? []) {
    expect(text).toContain(sentence);
    await expect(page.getByText(plain(sentence).slice(0, 40)).first()).toBeVisible();
  }
});

test("a row opens to what its figure rests on, and the pull-ups follow what is typed", async ({ page }) => {
  await signIn(page, "engineer");
  const view = await caseWith(page, titled("Pull-ups"), hurriedVolts("hurried.csv"));
  await visit(page, `/cases/${view.number}`);
  await page.getByRole("tab", { name: /^Limits/ }).click({ timeout: 30_000 });
  await page.getByRole("button", { name: "tHIGH", exact: true }).click();
  await expect(page.getByText("SCL rise 70 % to SCL fall 70 %")).toBeVisible();
  await expect(page.getByRole("img", { name: /How often each length of tHIGH came/ })).toBeVisible();
  const pullUps = page.getByRole("region", { name: "Pull-ups" });
  await pullUps.getByLabel("VDD, V").fill("3.3");
  await pullUps.getByLabel("Capacitance of a line, pF").fill("200");
  // TI SLVA689 section 4 gives 966.667 ohm to 1.77 kohm for Fast-mode; Standard-mode has 1000 ns to rise instead of 300 ns.
  await expect(pullUps).toContainText("Rp(min) 967 Ω");
  await expect(pullUps).toContainText("Rp(max) 5.9 kΩ");
  await pullUps.getByLabel("Pull-up fitted, Ω").fill("6800");
  await expect(pullUps).toContainText("6.8 kΩ is too large");
  await expect(pullUps).toContainText("data sheets decide");
  await pullUps.getByLabel("Capacitance of a line, pF").fill("2000");
  await expect(pullUps).toContainText("No passive solution");
  await expect(pullUps).toContainText("2000 pF is more than the 400 pF");
  await pullUps.getByLabel("Capacitance of a line, pF").fill("many");
  await expect(pullUps).toContainText("× a number above 0");
  // The overview stays at the top of the window and would cover half a row.
  await page.evaluate(() => window.scrollTo(0, 0));
  await expectAccessible(page);
});
