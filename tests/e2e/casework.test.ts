import { type Browser, expect as check, type Page } from "@playwright/test";
import { busCsv, busVcd } from "./support/captures";
import { call, caseWith, kept, makeLink, margin, openCase, readCase, row, rows, titled } from "./support/casework";
import { signIn, stranger } from "./support/people";
import { expect, test } from "./support/test";

/** What a guest sees at a link, in a browser that has no session. */
async function asGuest(browser: Browser, link: string, look: (page: Page) => Promise<void>): Promise<void> {
  const context = await stranger(browser);
  const page = await context.newPage();
  const complaints: string[] = [];
  page.on("pageerror", (error) => complaints.push(error.message));
  await page.goto(link);
  await look(page);
  await context.close();
  check(complaints).toEqual([]);
}

test("an engineer's whole way: upload a CSV, confirm, read, filter, tag, note, conclude, share, revoke", async ({
  page,
  browser,
}) => {
  test.slow();
  await signIn(page, "engineer");
  const title = titled("Oxygen figure blank");
  const number = await openCase(page, title, busCsv("tank-oxygen.csv"));

  // The file is read here while it travels; the proposal stands until a person has said yes.
  await expect(page.getByRole("heading", { name: title })).toBeVisible();
  await page.getByRole("button", { name: "yes, as read" }).click();
  await expect(page.getByRole("heading", { name: "Is this the right way round?" })).toHaveCount(0);
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  await expect(row(page, 6)).toHaveAttribute("aria-label", /0x3D.*no answer/i);
  await kept(page, number);

  // The view stands in the address bar, and a reload finds it there.
  await page.getByLabel("with NACK").check();
  await page.getByRole("combobox", { name: "direction" }).selectOption("W");
  await expect(rows(page)).toHaveCount(3);
  await row(page, 13).click();
  await expect(page).toHaveURL(/direction=W&nack=1&transaction=13$/);
  await page.reload();
  await expect(rows(page)).toHaveCount(3);
  await expect(row(page, 13)).toHaveAttribute("aria-selected", "true");
  await expect(page.getByRole("heading", { name: "Is this the right way round?" })).toHaveCount(0);

  // One key puts the tag and goes on to the next row.
  await page.keyboard.press("2");
  await expect(row(page, 20)).toHaveAttribute("aria-selected", "true");
  await expect(row(page, 13)).toContainText("not acknowledged");
  await margin(page).getByLabel("Note on 20").fill("The probe on tank 4 was never fitted.");
  await margin(page).getByRole("button", { name: "add note" }).click();
  await expect(row(page, 20).locator("sup")).toHaveText("1");
  await margin(page).getByRole("button", { name: "write it" }).click();
  await margin(page).getByLabel("#213 cites a transaction").fill("Nobody answers at 0x3D, first in #6.");
  await margin(page).getByRole("button", { name: "save", exact: true }).click();
  await page.getByLabel("Status").selectOption("in work");
  await expect.poll(async () => (await readCase(page, number)).status).toBe("in-work");
  await page.getByLabel("With", { exact: true }).selectOption("Tomas Fry");
  await expect.poll(async () => (await readCase(page, number)).assignee?.name).toBe("Tomas Fry");

  await page.reload();
  await expect(page.getByLabel("Status")).toHaveValue("in-work");
  await expect(page.getByLabel("With", { exact: true }).getByRole("option", { selected: true })).toHaveText("Tomas Fry");
  await expect(margin(page).getByText("The probe on tank 4 was never fitted.")).toBeVisible();
  await expect(row(page, 13)).toContainText("not acknowledged");
  await margin(page).getByRole("button", { name: "6", exact: true }).click();
  await expect(page).toHaveURL(/transaction=6$/);

  const { captures } = await readCase(page, number);
  await page.getByRole("button", { name: "Share", exact: true }).click();
  const link = await makeLink(page, "Probe supplier");
  await asGuest(browser, link, async (guest) => {
    await expect(guest.getByRole("heading", { name: title })).toBeVisible();
    await expect(rows(guest)).toHaveCount(3);
    await expect(row(guest, 6)).toHaveAttribute("aria-selected", "true");
    await expect(guest.getByText("read only")).toBeVisible();
    await expect(margin(guest).getByText("Nobody answers at 0x3D")).toBeVisible();
    await expect(margin(guest).getByText("The probe on tank 4 was never fitted.")).toBeVisible();
    for (const name of ["add note", "change", "delete", "take off", "write it", "Share", "Settings"]) {
      await expect(guest.getByRole("button", { name, exact: true })).toHaveCount(0);
    }
    await expect(guest.getByRole("link", { name: "Original" })).toHaveCount(0);
    const raw = await guest.request.get(`/api${new URL(link).pathname}/captures/${captures[0].id}/raw`, { maxRedirects: 0 });
    expect(raw.status()).toBe(403);
    const answer = await guest.reload();
    expect(answer?.status()).toBe(200);
    expect(answer?.headers()["x-robots-tag"]).toContain("noindex");
    // A link opens its own case and nothing else of the team.
    expect((await guest.request.get(`/api/cases/${number}`)).status()).toBe(401);
  });

  const dialog = page.getByRole("dialog", { name: "Share this case" });
  await expect(dialog.getByText("Probe supplier")).toBeVisible();
  await dialog.getByRole("button", { name: "Revoke" }).click();
  await expect(dialog.getByText(/revoked, ended/)).toBeVisible();
  const revoked = await page.request.get(link);
  expect(revoked.status()).toBe(404);
  expect(revoked.headers()["x-robots-tag"]).toContain("noindex");
  const archive = `/api${new URL(link).pathname}/captures/${captures[0].id}/archive`;
  expect((await page.request.get(archive, { maxRedirects: 0 })).status()).toBe(404);
});

test("a lead's way: two captures in one case, a link with a passphrase and the original file", async ({ page, browser }) => {
  test.slow();
  await signIn(page, "lead");
  const title = titled("Valves against level");
  const file = busVcd("tank-valves.vcd");
  const number = await openCase(page, title, busCsv("tank-oxygen.csv"), file);
  const captures = page.getByRole("navigation", { name: "Captures of this case" });
  await captures.getByRole("button", { name: "tank-valves.vcd" }).click();
  await page.getByRole("button", { name: "yes, as read" }).click();
  await expect(page.getByText("the bus carried 18 transactions by 2 controllers")).toBeVisible();
  await kept(page, number);
  // The one that was chosen stays open while the others arrive.
  await expect(captures.getByRole("button", { name: file.name })).toHaveAttribute("aria-pressed", "true");
  await page.getByRole("combobox", { name: "address" }).selectOption("32");
  await expect(rows(page)).toHaveCount(6);
  const { captures: stored } = await readCase(page, number);
  const place = stored.findIndex(({ name }) => name === file.name);
  await expect(page).toHaveURL(place === 0 ? /\?address=32$/ : /\?capture=2&address=32$/);

  await page.getByRole("button", { name: "Share", exact: true }).click();
  const link = await makeLink(page, "Valve supplier", { passphrase: "low tide at nine", raw: true });
  await page.keyboard.press("Escape");
  await expect(page.getByRole("dialog")).toHaveCount(0);
  await asGuest(browser, link, async (guest) => {
    await expect(guest.getByRole("heading", { name: "A shared case" })).toBeVisible();
    await expect(guest.getByText(title)).toHaveCount(0);
    await guest.getByLabel("Passphrase").fill("low tide at ten");
    await guest.getByRole("button", { name: "Open the case" }).click();
    await expect(guest.getByText(/^× /)).toBeVisible();
    await guest.getByLabel("Passphrase").fill("low tide at nine");
    await guest.getByRole("button", { name: "Open the case" }).click();
    await expect(guest.getByRole("heading", { name: title })).toBeVisible();
    await expect(rows(guest)).toHaveCount(6);
    await expect(guest.getByRole("button", { name: "tank-valves.vcd" })).toHaveAttribute("aria-pressed", "true");
    const download = guest.waitForEvent("download");
    await guest.getByRole("link", { name: "Original" }).click();
    expect((await download).suggestedFilename()).toBe("tank-valves.vcd");
    const stream = await (await download).createReadStream();
    const bytes: Buffer[] = [];
    for await (const chunk of stream) bytes.push(chunk);
    expect(Buffer.concat(bytes).equals(file.buffer)).toBe(true);
  });
  // The address alone, in a browser that never gave the passphrase, gives nothing away.
  await asGuest(browser, link, async (guest) => {
    const raw = await guest.request.get(`/api${new URL(link).pathname}/captures/${stored[place].id}/raw`, { maxRedirects: 0 });
    expect(raw.status()).toBe(403);
  });
});

test("a technician's way: swap channels, tag with one key after the other, no sharing", async ({ page }) => {
  test.slow();
  await signIn(page, "technician");
  const number = await openCase(page, titled("Unnamed probes"), busCsv("unnamed.csv", "Time [s],CH1,CH2"));
  const channels = page.getByRole("region", { name: "Is this the right way round?" });
  const asRead = channels.getByText(/^As read:/).locator("..");
  await expect(asRead).toContainText("SCL is CH1 (@2), SDA is CH2 (@3)");
  await expect(channels.getByText(/STARTs, 0 whole bytes/)).toBeVisible();
  await channels.getByRole("button", { name: "swap them" }).click();
  await expect(asRead).toContainText("SCL is CH2 (@3), SDA is CH1 (@2)");
  await channels.getByRole("button", { name: "swap them" }).click();
  await expect(asRead).toContainText("SCL is CH1 (@2), SDA is CH2 (@3)");
  await channels.getByRole("button", { name: "yes, as read" }).click();
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  await kept(page, number);

  await page.keyboard.press("n");
  await expect(row(page, 6)).toHaveAttribute("aria-selected", "true");
  for (const [at, key, next] of [
    [6, "2", 7],
    [7, "9", 8],
  ] as const) {
    await page.keyboard.press(key);
    await expect(row(page, next)).toHaveAttribute("aria-selected", "true");
    await expect(row(page, at)).toContainText(key === "2" ? "not acknowledged" : "as intended");
  }
  await page.reload();
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  await expect(row(page, 7)).toContainText("as intended");
  const view = await readCase(page, number);
  expect(view.captures[0].read).toMatchObject({ scl: "@2", sda: "@3" });

  await page.getByLabel("Status").selectOption("answered");
  await expect.poll(async () => (await readCase(page, number)).status).toBe("answered");
  await expect(page.getByRole("button", { name: "Share", exact: true })).toHaveCount(0);
  await expect(page.getByRole("button", { name: "write it" })).toHaveCount(0);
  await expect(page.getByRole("button", { name: "Rename" })).toHaveCount(0);
  expect((await call(page, "POST", `/api/cases/${number}/shares`, {})).status()).toBe(403);
  const edit = { version: view.version, finding: "mine" };
  expect((await call(page, "PATCH", `/api/cases/${number}`, edit)).status()).toBe(403);
});

test("support's way: read, ask in a note, and nothing more", async ({ page, browser, complaints }) => {
  complaints.expectComplaint("/cases/new");
  const other = await stranger(browser);
  const bench = await other.newPage();
  await signIn(bench, "technician");
  const made = await caseWith(bench, titled("Question from support"), busCsv("tank-oxygen.csv"));
  await other.close();

  await signIn(page, "support");
  await expect(page.getByRole("link", { name: "Open a capture" })).toHaveCount(0);
  await page.goto(`/cases/${made.number}`);
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  await page.getByRole("button", { name: "6", exact: true }).first().click();
  await expect(row(page, 6)).toHaveAttribute("aria-selected", "true");
  await page.keyboard.press("2");
  await margin(page).getByLabel("Note on 6").fill("Can the customer see this from outside?");
  await margin(page).getByRole("button", { name: "add note" }).click();
  await expect(row(page, 6).locator("sup")).toHaveText("1");
  await expect(margin(page).getByRole("button", { name: /^not acknowledged/ })).toHaveCount(0);
  await expect(page.getByLabel("Status")).toHaveCount(0);

  const view = await readCase(page, made.number);
  expect(view.notes).toHaveLength(1);
  expect(view.tags).toEqual([]);
  const [capture] = view.captures;
  const [tag] = (await (await call(page, "GET", "/api/fault-tags")).json()).fault_tags;
  const add = [{ capture: capture.id, fault_tag: tag.id, anchor: { kind: "transaction", transaction: 6 } }];
  const refused = [
    await call(page, "POST", `/api/cases/${made.number}/tags`, { add }),
    await call(page, "POST", "/api/uploads", { case: made.number, name: "x.csv", size: 100 }),
    await call(page, "POST", "/api/cases", { title: "mine" }),
    await call(page, "POST", `/api/cases/${made.number}/shares`, {}),
    await call(page, "PATCH", `/api/cases/${made.number}`, { version: view.version, status: "closed" }),
    await call(page, "GET", `/api/captures/${capture.id}/raw`),
  ];
  expect(refused.map((answer) => answer.status())).toEqual([403, 403, 403, 403, 403, 403]);
  expect((await page.goto("/cases/new"))?.status()).toBe(404);
});

test("a tag that is answered late takes nothing back that came meanwhile", async ({ page }) => {
  await signIn(page, "engineer");
  const number = await openCase(page, titled("Late answer"), busCsv("late.csv"));
  await expect(page.getByText("the bus carried 21 transactions")).toBeVisible();
  // The tag is answered only once the archive is kept and the page has learned of it.
  await page.route(/\/tags$/, async (route) => {
    const answer = await route.fetch();
    await kept(page, number);
    await expect(page.getByRole("link", { name: "Report" })).toBeVisible();
    await route.fulfill({ response: answer });
  });
  await page.keyboard.press("n");
  await page.keyboard.press("2");
  await expect(row(page, 6)).toContainText("not acknowledged");
  await expect(page.getByRole("link", { name: "Report" })).toBeVisible();
});
