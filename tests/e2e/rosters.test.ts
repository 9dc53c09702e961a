import type { Page } from "@playwright/test";
import { expectAccessible } from "./support/axe";
import { signIn } from "./support/people";
import { expect, test } from "./support/test";

/** A name of this run alone: a kept database may hold earlier ones. */
function named(word: string): string {
  return `${word} ${Date.now().toString(36)}`;
}

async function begin(page: Page, name: string): Promise<void> {
  await page.goto("/rosters");
  await page.getByLabel("Name", { exact: true }).fill(name);
  await page.getByRole("button", { name: "Begin it" }).click();
  await expect(page).toHaveURL(/\/rosters\/[0-9a-f-]{36}$/);
  await expect(page.getByRole("heading", { name, level: 1 })).toBeVisible();
}

test("an engineer writes a roster in one notation and finds it by the other", async ({ page }) => {
  await signIn(page, "engineer");
  const name = named("Outflow bench");
  await begin(page, name);
  await page.getByRole("button", { name: "Add a device" }).click();
  await page.getByLabel("Name of device 1").fill("outflow gate");
  await page.getByLabel("Bytes of outflow gate").fill("AC");
  await expect(page.getByLabel("Address of outflow gate")).toHaveValue("0x56");
  await page.getByLabel("May stretch of outflow gate").fill("soon");
  await page.getByRole("button", { name: "Save", exact: true }).click();
  await expect(page.getByText("× a time such as 5.2 µs")).toBeVisible();
  await page.getByLabel("May stretch of outflow gate").fill("25 ms");
  await page.getByRole("button", { name: "Save", exact: true }).click();
  await expect(page.getByText("Saved as version 2.")).toBeVisible();
  await expectAccessible(page);

  const csv = await page.request.get(await hrefOf(page, /as CSV/));
  expect(await csv.text()).toContain("target,outflow gate,0x56,0xAC,,,,0.025,");

  await page.goto("/rosters");
  await page.getByLabel(/Find a device/).fill("0xAD");
  await expect(page.getByRole("row", { name: /0x56 AC\/AD outflow gate/ }).first()).toBeVisible();
  await page.getByLabel(/Find a device/).fill("0x57");
  await expect(page.getByText("0 devices fit")).toBeVisible();
  await expectAccessible(page);
});

async function hrefOf(page: Page, name: RegExp): Promise<string> {
  return (await page.getByRole("link", { name }).getAttribute("href")) ?? "";
}

test("a roster that two people changed is overwritten by neither unseen", async ({ page, context, complaints }) => {
  complaints.expectComplaint("409");
  await signIn(page, "engineer");
  await begin(page, named("Shared bench"));
  const other = await context.newPage();
  await other.goto(page.url());
  for (const [at, device] of [
    [other, "theirs"],
    [page, "mine"],
  ] as const) {
    await at.getByRole("button", { name: "Add a device" }).click();
    await at.getByLabel("Name of device 1").fill(device);
    await at.getByLabel(`Address of ${device}`).fill("0x21");
    await at.getByRole("button", { name: "Save", exact: true }).click();
  }
  await expect(page.getByText("Somebody else changed this roster meanwhile")).toBeVisible();
  await expect(page.getByText("target,theirs,0x21,0x42")).toBeVisible();
  await page.getByRole("button", { name: "Save mine over it" }).click();
  await expect(page.getByText("Saved as version 3.")).toBeVisible();
  await other.reload();
  await expect(other.getByLabel("Name of mine")).toHaveValue("mine");
});

test("a CSV becomes a roster, and a wrong line is named", async ({ page }) => {
  await signIn(page, "engineer");
  await page.goto("/rosters");
  const file = (text: string) => ({ name: "line.csv", mimeType: "text/csv", buffer: Buffer.from(text) });
  const field = page.getByLabel("From a CSV, if there is one");
  await field.setInputFiles(file("name,address_7bit,address_8bit\nfeed log,0x50,0xA2\n"));
  await expect(page.getByText("Line 2 of the roster: the two addresses 0x50 and 0xA2 do not agree.")).toBeVisible();
  await field.setInputFiles(file("name,address_8bit\nfeed log,0xA0\nvalve port,0x40\n"));
  await page.getByLabel("Name", { exact: true }).fill(named("From a file"));
  await page.getByRole("button", { name: "Import it" }).click();
  await expect(page.getByLabel("Address of valve port")).toHaveValue("0x20");
  // Whose message keeps the bus: the lower address, and the bit at which 0100000 and 1010000 part.
  await expect(page.getByRole("row", { name: /^valve port, write/ })).toContainText("keeps, bit 0");
});

test("support reads rosters and profiles and is offered no change", async ({ page }) => {
  await signIn(page, "support");
  await page.goto("/rosters");
  await expect(page.getByRole("button", { name: "Begin it" })).toHaveCount(0);
  await page.getByRole("table", { name: "Rosters" }).getByRole("link").first().click();
  await expect(page.getByRole("table", { name: "Devices" })).toContainText("0x50");
  await expect(page.getByRole("button", { name: "Save", exact: true })).toHaveCount(0);
  await page.goto("/profiles?mode=Standard-mode");
  await expect(page.getByRole("row", { name: /^tLOW 4.700 – ns UM10204/ })).toBeVisible();
  await expect(page.getByRole("button", { name: "Derive it" })).toHaveCount(0);
  await expectAccessible(page);
});

test("a profile of the team changes values of its base, version by version", async ({ page }) => {
  await signIn(page, "engineer");
  await page.goto("/profiles?mode=Fast-mode");
  const name = named("Tank line");
  await page.getByLabel("Name", { exact: true }).fill(name);
  await page.getByRole("button", { name: "Derive it" }).click();
  await expect(page.getByRole("heading", { name, level: 1 })).toBeVisible();
  await page.getByLabel("Least of tLOW", { exact: true }).fill("fast");
  await expect(page.getByText("× a number, or - for no limit")).toBeVisible();
  await page.getByLabel("Least of tLOW", { exact: true }).fill("1400");
  await page.getByLabel("Where the change of tLOW comes from").fill("test plan 12");
  await page.getByRole("button", { name: "Save as version 2" }).click();
  await expect(page.getByText(/Saved as version 2/)).toBeVisible();
  await page.reload();
  await expect(page.getByLabel("Least of tLOW", { exact: true })).toHaveValue("1400");
  await expect(page.getByText("1 values differ.", { exact: false })).toBeVisible();
  // Inside a High-speed transfer the same profile has values of its own.
  await page.getByText("Inside a High-speed transfer", { exact: true }).click();
  await page.getByLabel("Least of tLOW (Hs)").fill("170");
  await page.getByRole("button", { name: "Save as version 3" }).click();
  await expect(page.getByText(/Saved as version 3/)).toBeVisible();
  await page.reload();
  await expect(page.getByLabel("Least of tLOW (Hs)")).toHaveValue("170");
  await expect(page.getByText("2 values differ.", { exact: false })).toBeVisible();
  await expectAccessible(page);
});

test("help is there without an account", async ({ page }) => {
  await page.goto("/help");
  for (const part of ["Words", "Keys", "Evidence of a contest", "How sure is sure", "Cautions"])
    await expect(page.getByRole("heading", { name: part, exact: true })).toBeVisible();
  await expect(page.getByRole("table", { name: /stated probability/ })).toBeVisible();
  await expectAccessible(page);
});
