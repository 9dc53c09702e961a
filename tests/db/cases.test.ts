import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { CaseListSchema, CaseViewSchema, EventListSchema } from "@/lib/case/wire";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { ask, gatherTeam, type TestTeam } from "@/tests/support/team";

let database: TestDatabase;
let cases: typeof import("@/app/api/cases/route");
let one: typeof import("@/app/api/cases/[number]/route");
let notes: typeof import("@/app/api/cases/[number]/notes/route");
let note: typeof import("@/app/api/cases/[number]/notes/[id]/route");
let events: typeof import("@/app/api/cases/[number]/events/route");
let people: typeof import("@/app/api/people/route");
let ours: TestTeam;
let theirs: TestTeam;

beforeAll(async () => {
  database = await openTestDatabase();
  cases = await import("@/app/api/cases/route");
  one = await import("@/app/api/cases/[number]/route");
  notes = await import("@/app/api/cases/[number]/notes/route");
  note = await import("@/app/api/cases/[number]/notes/[id]/route");
  events = await import("@/app/api/cases/[number]/events/route");
  people = await import("@/app/api/people/route");
  ours = await gatherTeam("Marrow Bay");
  theirs = await gatherTeam("Lower Sound");
});

afterAll(() => database.close());

async function open(team: TestTeam, title: string): Promise<number> {
  const { status, body } = await ask(team.engineer.browser, cases.POST, "POST", { body: { title } });
  expect(status).toBe(201);
  return CaseViewSchema.parse(body).number;
}

describe("a case", () => {
  it("is numbered in its team, however many are opened at once", async () => {
    const before = await open(ours, "first");
    const opened = await Promise.all(Array.from({ length: 8 }, (_, at) => open(ours, `at once ${at}`)));
    expect([...opened].sort((a, b) => a - b)).toEqual(Array.from({ length: 8 }, (_, at) => before + 1 + at));
    expect(await open(theirs, "another team counts for itself")).toBe(1);
  });

  it("is read by every role of its team, with what the role may do", async () => {
    const number = await open(ours, "  Pump\u0000 2\nstalls  ");
    for (const role of ["lead", "engineer", "technician", "support"] as const) {
      const { status, body } = await ask(ours[role].browser, one.GET, "GET", { params: { number } });
      expect(status).toBe(200);
      const view = CaseViewSchema.parse(body);
      expect(view.title).toBe("Pump 2 stalls");
      expect(view.may.includes("finding.write")).toBe(role === "lead" || role === "engineer");
    }
  });

  it("is not there for other teams, whatever is asked of it", async () => {
    const number = await open(ours, "ours alone");
    const foreign = theirs.lead.browser;
    const missing = await ask(ours.lead.browser, one.GET, "GET", { params: { number: 99_999 } });
    for (const asked of [
      await ask(foreign, one.GET, "GET", { params: { number } }),
      await ask(foreign, one.PATCH, "PATCH", { params: { number }, body: { version: 1, title: "taken over" } }),
      await ask(foreign, one.DELETE, "DELETE", { params: { number } }),
      await ask(foreign, events.GET, "GET", { params: { number } }),
      await ask(foreign, notes.POST, "POST", {
        params: { number },
        body: { capture: null, anchor: { kind: "whole" }, text: "hello" },
      }),
    ]) {
      expect(asked.status).toBe(404);
      expect(asked.body.title).toBe(missing.body.title);
    }
    expect((await ask(ours.lead.browser, one.GET, "GET", { params: { number } })).body.title).toBe("ours alone");
  });

  it("cannot be reached with a number that is none", async () => {
    for (const number of ["0", "-1", "1.5", "x", "99999999999"]) {
      expect((await ask(ours.lead.browser, one.GET, "GET", { params: { number } })).status).toBe(404);
    }
  });

  it("refuses what cannot be stored and names the field", async () => {
    for (const [body, field] of [
      [{ title: "   " }, "title"],
      [{ title: "x".repeat(201) }, "title"],
      [{}, "title"],
      [
        {
          title: "roster of nobody",
          settings: { version: 1, limits: { kind: "automatic" }, cb_pf: null, roster: crypto.randomUUID() },
        },
        "settings.roster",
      ],
      [
        { title: "future", settings: { version: 2, limits: { kind: "automatic" }, cb_pf: null, roster: null } },
        "settings.version",
      ],
    ] as const) {
      const { status, body: told } = await ask(ours.lead.browser, cases.POST, "POST", { body });
      expect(status).toBe(400);
      expect(Object.keys(told.fields)).toContain(field);
    }
  });

  it("lets each role change what its role includes", async () => {
    const number = await open(ours, "roles");
    const edits = {
      title: { title: "renamed" },
      status: { status: "in-work" },
      assignee: { assignee: ours.technician.id },
      finding: { finding: "Controller 2 yields at bit 5." },
    };
    const allowed = {
      lead: ["title", "status", "assignee", "finding"],
      engineer: ["title", "status", "assignee", "finding"],
      technician: ["status"],
      support: [],
    };
    for (const role of ["support", "technician", "engineer", "lead"] as const) {
      for (const [field, edit] of Object.entries(edits)) {
        const { body: view } = await ask(ours.lead.browser, one.GET, "GET", { params: { number } });
        const { status } = await ask(ours[role].browser, one.PATCH, "PATCH", {
          params: { number },
          body: { version: view.version, ...edit },
        });
        expect([role, field, status]).toEqual([role, field, (allowed[role] as string[]).includes(field) ? 200 : 403]);
      }
    }
    const { body } = await ask(ours.support.browser, one.GET, "GET", { params: { number } });
    expect(body).toMatchObject({ title: "renamed", status: "in-work", assignee: { name: "Marrow Bay technician" } });
  });

  it("is assigned to members of the team only", async () => {
    const number = await open(ours, "whose");
    const { status, body } = await ask(ours.lead.browser, one.PATCH, "PATCH", {
      params: { number },
      body: { version: 1, assignee: theirs.engineer.id },
    });
    expect(status).toBe(400);
    expect(body.fields.assignee).toBe("is not a member of this team");
    const named = await ask(ours.support.browser, people.GET, "GET");
    expect(named.body.people.map((person: { name: string }) => person.name)).toHaveLength(4);
  });

  it("is removed by a lead alone, with all that hangs below it", async () => {
    const number = await open(ours, "short-lived");
    await ask(ours.support.browser, notes.POST, "POST", {
      params: { number },
      body: { capture: null, anchor: { kind: "whole" }, text: "why?" },
    });
    expect((await ask(ours.engineer.browser, one.DELETE, "DELETE", { params: { number } })).status).toBe(403);
    expect((await ask(ours.lead.browser, one.DELETE, "DELETE", { params: { number } })).status).toBe(204);
    expect((await ask(ours.lead.browser, one.GET, "GET", { params: { number } })).status).toBe(404);
    const left = await database.query<{ n: string }>("select count(*) as n from notes where text = 'why?'");
    expect(Number(left[0].n)).toBe(0);
    const trail = await database.query("select actor_name, detail from audits where event = 'case.deleted'");
    expect(trail).toEqual([{ actor_name: "Marrow Bay lead", detail: { number, title: "short-lived" } }]);
    expect(await open(ours, "a number is not given twice")).toBe(number + 1);
  });

  it("leaves a trail of what was changed, by whom, from what to what", async () => {
    const number = await open(ours, "trail");
    await ask(ours.engineer.browser, one.PATCH, "PATCH", { params: { number }, body: { version: 1, finding: "It was noise." } });
    const { body } = await ask(ours.support.browser, events.GET, "GET", { params: { number } });
    const trail = EventListSchema.parse(body).events;
    expect(trail.map((event) => event.kind)).toEqual(["case.edited", "case.created"]);
    expect(trail[0]).toMatchObject({
      actor: { id: ours.engineer.id, name: "Marrow Bay engineer" },
      words: "changed the finding",
      before: { finding: "" },
      after: { finding: "It was noise." },
    });
  });
});

describe("the list", () => {
  let team: TestTeam;
  const list = async (query: string, who: "technician" | "lead" = "technician") => {
    const { status, body } = await ask(team[who].browser, cases.GET, "GET", { query });
    expect(status).toBe(200);
    return CaseListSchema.parse(body);
  };

  beforeAll(async () => {
    team = await gatherTeam("Upper Weir");
    for (let at = 1; at <= 53; at += 1) await open(team, `line ${at}`);
    await open(team, "100% of_reads fail");
    const edit = (number: number, change: object) =>
      ask(team.lead.browser, one.PATCH, "PATCH", { params: { number }, body: { version: 1, ...change } });
    await edit(3, { status: "closed" });
    await edit(4, { status: "answered", assignee: team.technician.id });
    await edit(5, { finding: "Target 0x48 stretches SCL" });
  });

  it("is paged, newest change first", async () => {
    const first = await list("");
    expect(first).toMatchObject({ total: 54, page: 1, pages: 2 });
    expect(first.cases).toHaveLength(50);
    expect(first.cases.slice(0, 3).map((row) => row.number)).toEqual([5, 4, 3]);
    expect((await list("page=2")).cases).toHaveLength(4);
    expect((await list("page=3")).cases).toHaveLength(0);
  });

  it("finds by number, title, finding, status and assignee", async () => {
    const numbers = async (query: string) => (await list(query)).cases.map((row) => row.number).sort((a, b) => a - b);
    expect(await numbers(`q=${encodeURIComponent("#54")}`)).toEqual([54]);
    expect(await numbers("q=line 53")).toEqual([53]);
    expect(await numbers("q=0X48 STRETCHES")).toEqual([5]);
    expect(await numbers("status=closed,answered")).toEqual([3, 4]);
    expect(await numbers("assignee=me")).toEqual([4]);
    expect(await numbers(`assignee=${team.technician.id}&status=answered`)).toEqual([4]);
    expect((await list("assignee=nobody")).total).toBe(53);
    expect((await list("verdict=none")).total).toBe(54);
    expect((await list("verdict=fail")).total).toBe(0);
  });

  it("takes % and _ for what they are", async () => {
    expect((await list(`q=${encodeURIComponent("100%")}`)).total).toBe(1);
    expect((await list("q=of_reads")).total).toBe(1);
    expect((await list("q=ofxreads")).total).toBe(0);
    expect((await list(`q=${encodeURIComponent("%")}`)).total).toBe(1);
  });

  it("shows nothing of other teams, even by the right words", async () => {
    await open(theirs, "secret prototype");
    expect((await list("q=secret prototype")).total).toBe(0);
  });

  it("refuses a query that makes no sense", async () => {
    for (const query of ["status=lost", "page=0", "page=x", "sort=mood", "assignee=somebody"]) {
      expect((await ask(team.lead.browser, cases.GET, "GET", { query })).status).toBe(400);
    }
  });
});

describe("notes", () => {
  const whole = { capture: null, anchor: { kind: "whole" } } as const;

  it("are numbered in their case and never twice the same", async () => {
    const number = await open(ours, "notes");
    const add = async (text: string) =>
      (await ask(ours.support.browser, notes.POST, "POST", { params: { number }, body: { ...whole, text } })).body.note;
    const made = await Promise.all(["a", "b", "c", "d"].map(add));
    expect(made.map((row) => row.number).sort()).toEqual([1, 2, 3, 4]);
    const last = made.find((row) => row.number === 4);
    const gone = await ask(ours.support.browser, note.DELETE, "DELETE", {
      params: { number, id: last.id },
      body: { version: 1 },
    });
    expect(gone.status).toBe(204);
    expect((await add("e")).number).toBe(5);
  });

  it("are changed by their author and by who may edit the case", async () => {
    const number = await open(ours, "whose note");
    const { body } = await ask(ours.support.browser, notes.POST, "POST", {
      params: { number },
      body: { ...whole, text: "Is it the cable?" },
    });
    const params = { number, id: body.note.id };
    const edit = (role: "technician" | "support" | "engineer", version: number, text: string) =>
      ask(ours[role].browser, note.PATCH, "PATCH", { params, body: { version, text } });
    expect((await edit("technician", 1, "No.")).status).toBe(403);
    expect((await edit("support", 1, "Is it the new cable?")).status).toBe(200);
    expect((await edit("engineer", 2, "Is it the new cable? (No: see 2.)")).status).toBe(200);
  });

  it("need a capture of the same case for a place in it", async () => {
    const number = await open(ours, "place");
    const add = (body: unknown) => ask(ours.engineer.browser, notes.POST, "POST", { params: { number }, body });
    expect((await add({ capture: null, anchor: { kind: "transaction", transaction: 3 }, text: "here" })).status).toBe(400);
    expect(
      (await add({ capture: crypto.randomUUID(), anchor: { kind: "transaction", transaction: 3 }, text: "here" })).status,
    ).toBe(400);
    expect(
      (await add({ capture: crypto.randomUUID(), anchor: { kind: "range", from_tick: 9, to_tick: 3 }, text: "back" })).status,
    ).toBe(400);
    expect((await add({ ...whole, text: " \n " })).status).toBe(400);
  });
});
