import type { Page } from "@playwright/test";
import { expectAccessible } from "./support/axe";
import { letterTo, linkIn } from "./support/mail";
import { account, signIn, stranger } from "./support/people";
import { expect, test } from "./support/test";

const password = "nine tanks in a row";
let people = 0;

/** An address of nobody yet; the run's own number keeps a kept database from knowing it. */
function address(name: string): string {
  people += 1;
  return `${name}-${Date.now().toString(36)}-${people}@marrow.test`;
}

async function foundTeam(page: Page, team: string): Promise<string> {
  const email = address("lead");
  await page.goto("/sign-up");
  await page.getByLabel("Team").fill(team);
  await page.getByLabel("Your name").fill("Ines Falk");
  await page.getByLabel("E-mail").fill(email);
  await page.getByLabel("Password").fill(password);
  await page.getByRole("button", { name: "Found the team" }).click();
  await expect(page).toHaveURL(/\/cases$/);
  return email;
}

async function enter(page: Page, email: string, word: string): Promise<void> {
  await page.getByLabel("E-mail").fill(email);
  await page.getByLabel("Password").fill(word);
  await page.getByRole("button", { name: "Sign in" }).click();
}

async function invite(page: Page, email: string, role: string): Promise<string> {
  await page.goto("/team");
  await page.getByLabel("E-mail").fill(email);
  await page.getByLabel("Role", { exact: true }).selectOption(role);
  await page.getByRole("button", { name: "Send the invitation" }).click();
  await expect(page.getByRole("cell", { name: email, exact: true })).toBeVisible();
  return linkIn(await letterTo(email));
}

test("a form names each wrong field, goes to the first, and keeps what was typed", async ({ page }) => {
  await page.goto("/sign-up");
  await page.getByLabel("Team").fill("Outflow works");
  await page.getByLabel("Password").fill("short");
  await page.getByRole("button", { name: "Found the team" }).click();
  await expect(page.getByText("× Enter your name.")).toBeVisible();
  await expect(page.getByText("× That is too short")).toBeVisible();
  await expect(page.getByLabel("Your name")).toBeFocused();
  await expect(page.getByLabel("Team")).toHaveValue("Outflow works");
  await expect(page.getByLabel("Password")).toHaveValue("");
  await expectAccessible(page);
});

test("a lead invites, changes a role and removes; the other follows along", async ({ page, browser, complaints }) => {
  // Two browsers and three looks for accessibility.
  test.slow();
  complaints.expectComplaint("/team/audit");
  await foundTeam(page, "Outflow works");
  const email = address("tor");
  const link = await invite(page, email, "technician");
  await expectAccessible(page);

  const elsewhere = await stranger(browser);
  const other = await elsewhere.newPage();
  await other.goto(link);
  await expectAccessible(other);
  await expect(other.getByText(`as technician`)).toBeVisible();
  await other.getByLabel("Your name").fill("Tor Lind");
  await other.getByLabel("Password").fill(password);
  await other.getByRole("button", { name: "Join the team" }).click();
  await expect(other).toHaveURL(/\/cases$/);
  await other.goto(link);
  await expect(other.getByRole("heading", { name: "This invitation no longer works" })).toBeVisible();
  await other.goto("/team");
  await expect(other.getByRole("cell", { name: "Tor Lind (you)" })).toBeVisible();
  await expect(other.getByRole("button", { name: "Send the invitation" })).toHaveCount(0);
  expect((await other.goto("/team/audit"))?.status()).toBe(404);

  await page.reload();
  await page.getByRole("combobox", { name: "Role of Tor Lind" }).selectOption("support");
  await page.getByRole("button", { name: "Save role of Tor Lind" }).click();
  await expect(page.getByText("Role saved.")).toBeVisible();
  await page.getByRole("combobox", { name: "Role of Ines Falk" }).selectOption("support");
  await page.getByRole("button", { name: "Save role of Ines Falk" }).click();
  await expect(page.getByText("A team keeps at least one lead")).toBeVisible();
  await page.locator("summary", { hasText: "Remove" }).click();
  await page.getByRole("button", { name: "Remove Tor Lind from the team" }).click();
  await expect(page.getByRole("cell", { name: "Tor Lind", exact: true })).toHaveCount(0);
  await other.goto("/cases");
  await expect(other.getByText("You are in no team")).toBeVisible();
  await elsewhere.close();

  await page.goto("/team/audit");
  for (const what of ["team founded", "member invited", "member joined", "member role changed", "member removed"]) {
    await expect(page.getByRole("cell", { name: what, exact: true })).toBeVisible();
  }
  await expectAccessible(page);
});

test("a forgotten password is replaced by mail, and other browsers are signed out", async ({ page, browser }) => {
  const email = await foundTeam(page, "Outflow works");
  const elsewhere = await stranger(browser);
  const other = await elsewhere.newPage();
  await other.goto("/sign-in");
  await other.getByRole("link", { name: "Forgot the password?" }).click();
  // Both pages have a field of this name; the one to fill is that of the page being gone to.
  await expect(other.getByRole("button", { name: "Mail me a link" })).toBeVisible();
  await other.getByLabel("E-mail").fill(email.toUpperCase());
  await other.getByRole("button", { name: "Mail me a link" }).click();
  await expect(other.getByText("a mail with a link is on its way")).toBeVisible();
  const link = linkIn(await letterTo(email));
  await other.goto(link);
  await other.getByLabel("New password").fill("ten tanks in a row");
  await other.getByRole("button", { name: "Set the password" }).click();
  await expect(other).toHaveURL(/\/cases$/);
  await page.goto("/account");
  await expect(page).toHaveURL(/\/sign-in\?next=%2Faccount$/);
  await enter(page, email, password);
  await expect(page.getByText("do not belong together")).toBeVisible();
  await enter(page, email, "ten tanks in a row");
  await expect(page).toHaveURL(/\/account$/);
  await expect(page.getByRole("button", { name: "Sign out every other browser" })).toBeVisible();
  await expectAccessible(page);
  await other.goto(link);
  await expect(other.getByRole("heading", { name: "This link no longer works" })).toBeVisible();
  await elsewhere.close();
});

test("accepting, leaving and entering work without script", async ({ page, browser }) => {
  await foundTeam(page, "Outflow works");
  const email = address("noscript");
  const link = await invite(page, email, "engineer");
  const plain = await browser.newContext({ javaScriptEnabled: false, colorScheme: "dark" });
  const other = await plain.newPage();
  await other.goto(link);
  await other.getByLabel("Your name").fill("Una Script");
  await other.getByLabel("Password").fill("short");
  await other.getByRole("button", { name: "Join the team" }).click();
  await expect(other.getByText("× That is too short")).toBeVisible();
  await expect(other.getByLabel("Your name")).toHaveValue("Una Script");
  await other.getByLabel("Password").fill(password);
  await other.getByRole("button", { name: "Join the team" }).click();
  await expect(other).toHaveURL(/\/cases$/);
  await other.goto("/account");
  await other.getByRole("button", { name: "Sign out", exact: true }).click();
  await other.goto("/team");
  await enter(other, email, password);
  await expect(other).toHaveURL(/\/team$/);
  await plain.close();
});

for (const role of ["lead", "engineer", "technician", "support"]) {
  test(`the demo ${role} signs in, sees the team, and signs out`, async ({ page }) => {
    await signIn(page, role);
    await page.goto("/team");
    await expect(page.getByRole("cell", { name: account(role).email, exact: true })).toBeVisible();
    await expect(page.getByRole("button", { name: "Send the invitation" })).toHaveCount(role === "lead" ? 1 : 0);
    await page.getByRole("button", { name: "Sign out", exact: true }).click();
    await expect(page.getByRole("link", { name: "Sign in" }).first()).toBeVisible();
    await page.goto("/team");
    await expect(page).toHaveURL(/\/sign-in/);
  });
}

test("every page has a content policy of its own and tells its address to no other site", async ({ request }) => {
  const nonces = new Set<string>();
  for (const path of ["/", "/sign-in", "/sign-up", "/forgot"]) {
    const headers = (await request.get(path)).headers();
    const policy = headers["content-security-policy"];
    const nonce = /'nonce-([^']+)'/.exec(policy)?.[1] ?? "";
    expect(nonce.length).toBeGreaterThanOrEqual(22);
    nonces.add(nonce);
    expect(policy).toContain("frame-ancestors 'none'");
    expect(policy).toContain(`connect-src 'self' ${new URL(process.env.S3_ENDPOINT ?? "").origin};`);
    expect(policy).not.toMatch(/script-src[^;]*'unsafe/);
    expect(headers["referrer-policy"]).toBe("same-origin");
    expect(headers["x-content-type-options"]).toBe("nosniff");
  }
  expect(nonces.size).toBe(4);
});

test("the icon is there under the name that browsers ask for by themselves, too", async ({ request }) => {
  const answer = await request.get("/favicon.ico");
  expect(answer.status()).toBe(200);
  expect(answer.headers()["content-type"]).toContain("image/svg+xml");
});
