import { busCsv } from "./support/captures";
import { call, caseWith, margin, readCase, titled } from "./support/casework";
import { signIn, stranger } from "./support/people";
import { expect, test } from "./support/test";

test("two people write the same finding: both texts stand until one is chosen, and none is lost", async ({
  page,
  browser,
  complaints,
}) => {
  test.slow();
  // The answer 409 is what this test is about.
  complaints.expectComplaint(/\/api\/cases\/\d+/);
  await signIn(page, "engineer");
  const made = await caseWith(page, titled("Written by two"), busCsv("tank-oxygen.csv"));
  await page.goto(`/cases/${made.number}`);
  await expect(margin(page).getByRole("button", { name: "write it" })).toBeVisible();

  const elsewhere = await stranger(browser);
  const other = await elsewhere.newPage();
  await signIn(other, "lead");
  await other.goto(`/cases/${made.number}`);
  await margin(other).getByRole("button", { name: "write it" }).click();
  await margin(other).getByLabel("#213 cites a transaction").fill("The probe was never fitted.");
  await margin(other).getByRole("button", { name: "save", exact: true }).click();
  await expect(margin(other).getByText("The probe was never fitted.")).toBeVisible();
  // A change of another field does not stand in anybody's way.
  await other.getByLabel("Status").selectOption("in-work");
  await expect.poll(async () => (await readCase(page, made.number)).status).toBe("in-work");

  await margin(page).getByRole("button", { name: "write it" }).click();
  await margin(page).getByLabel("#213 cites a transaction").fill("The probe has no supply.");
  await margin(page).getByRole("button", { name: "save", exact: true }).click();
  const dialog = page.getByRole("dialog", { name: "Somebody else changed this meanwhile" });
  await expect(dialog).toContainText("The probe was never fitted.");
  await expect(dialog).toContainText("The probe has no supply.");
  await dialog.getByRole("button", { name: "Keep theirs" }).click();
  await expect(dialog).toHaveCount(0);
  // One's own words are still in the field; saving them now is a choice made with open eyes.
  await expect(margin(page).getByLabel("#213 cites a transaction")).toHaveValue("The probe has no supply.");
  await expect(page.getByLabel("Status")).toHaveValue("in-work");
  expect((await readCase(page, made.number)).finding).toBe("The probe was never fitted.");
  await margin(page).getByLabel("#213 cites a transaction").fill("Never fitted, and no supply.");
  await margin(page).getByRole("button", { name: "save", exact: true }).click();
  await expect(margin(page).getByText("Never fitted, and no supply.")).toBeVisible();

  await margin(other).getByRole("button", { name: "change" }).click();
  await margin(other).getByLabel("#213 cites a transaction").fill("Fitted since May.");
  await margin(other).getByRole("button", { name: "save", exact: true }).click();
  const theirs = other.getByRole("dialog", { name: "Somebody else changed this meanwhile" });
  await expect(theirs).toContainText("Never fitted, and no supply.");
  await theirs.getByRole("button", { name: "Save mine over it" }).click();
  await expect(theirs).toHaveCount(0);
  await expect(margin(other).getByText("Fitted since May.")).toBeVisible();
  await elsewhere.close();

  const view = await readCase(page, made.number);
  expect([view.finding, view.status]).toEqual(["Fitted since May.", "in-work"]);
  // What was written over stands in the history of the case.
  const { events } = await (await call(page, "GET", `/api/cases/${made.number}/events`)).json();
  const befores = events.map((event: { before: { finding?: string } | null }) => event.before?.finding);
  expect(befores).toEqual(expect.arrayContaining(["The probe was never fitted.", "Never fitted, and no supply."]));
});
