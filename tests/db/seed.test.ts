import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { demoCaptures } from "@/fixtures/demo/captures";
import { Browser } from "@/tests/support/browser";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { ask } from "@/tests/support/team";

let database: TestDatabase;

beforeAll(async () => {
  database = await openTestDatabase();
});

afterAll(() => database.close());

describe("the demo team", () => {
  it("is made once, whole, and opens with the accounts told", async () => {
    const { seedDemo } = await import("@/lib/server/seed");
    const { signIn } = await import("@/lib/server/auth/actions");
    const cases = await import("@/app/api/cases/route");
    const one = await import("@/app/api/cases/[number]/route");
    const archive = await import("@/app/api/captures/[id]/archive/route");
    const accounts = await seedDemo();
    expect(accounts.map((account) => account.role)).toEqual(["lead", "engineer", "technician", "support"]);
    for (const { email, password } of accounts) {
      const browser = new Browser();
      await browser.submit(signIn, { email, password, next: "/cases" });
      const list = await ask(browser, cases.GET, "GET");
      expect(list.body.total).toBe(demoCaptures().length);
    }
    const browser = new Browser();
    await browser.submit(signIn, { email: accounts[3].email, password: accounts[3].password, next: "/cases" });
    const list = await ask(browser, cases.GET, "GET", { query: "sort=number" });
    for (const row of list.body.cases) {
      const { body } = await ask(browser, one.GET, "GET", { params: { number: row.number } });
      expect(body.finding.length).toBeGreaterThan(20);
      expect(body.captures[0].summary.transactionCount).toBeGreaterThan(0);
      expect(body.roster.length).toBeGreaterThan(3);
      const moved = await ask(browser, archive.GET, "GET", { params: { id: body.captures[0].id } });
      expect((await fetch(moved.headers.get("location") ?? "")).status).toBe(200);
    }
    const contested = list.body.cases.filter((row: { contests: number }) => row.contests > 0);
    expect(contested.length).toBeGreaterThanOrEqual(2);
    const before = await database.query("select id from cases union all select id from users union all select id from captures");
    // A case whose making broke off is made again; everything else stays as it is.
    await database.query("delete from events where kind = 'case.edited' and case_id = (select id from cases where number = 7)");
    expect(await seedDemo()).toEqual(accounts);
    const after = await database.query("select id from cases union all select id from users union all select id from captures");
    expect(after).toHaveLength(before.length);
    expect(after.filter(({ id }) => !before.some((row) => row.id === id))).toHaveLength(2);
  }, 300_000);
});
