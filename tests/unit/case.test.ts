import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { z } from "zod";
import { analysisSettings } from "@/lib/case/analysis";
import {
  AnchorSchema,
  type CaseFile,
  CaseFileSchema,
  defaultSettings,
  FindingSchema,
  NoteTextSchema,
  ReadSchema,
  TitleSchema,
} from "@/lib/case/case";
import { defaultFaultTags } from "@/lib/case/catalogue";
import { redact } from "@/lib/case/redact";
import { climb, type Step, upgradeSettings } from "@/lib/case/upgrade";
import { FileNameSchema, partSize, UPLOAD_LIMIT } from "@/lib/case/upload";
import { CaseQuerySchema, ViewStateSchema } from "@/lib/case/wire";

const id = (n: number) => `00000000-0000-4000-8000-${String(n).padStart(12, "0")}`;
const at = "2026-11-02T08:15:00.000Z";

const file: CaseFile = {
  format: "firstlow.case/1",
  team: "Marrow Bay hatchery",
  number: 12,
  title: "Tank 4",
  status: "in-work",
  assignee: "Tomas Fry",
  finding: "The pump controller yields.",
  settings: { ...defaultSettings, roster: id(9) },
  captures: [
    {
      id: id(1),
      ordinal: 1,
      name: "tank4.csv",
      size: 10,
      sha256: "0".repeat(64),
      uploaded_by: "Wanda Gill",
      created_at: at,
      read: {},
      log: null,
      timebase: null,
      archive_size: null,
      summary: null,
    },
  ],
  notes: [
    {
      id: id(2),
      number: 1,
      capture: id(1),
      anchor: { kind: "transaction", transaction: 4 },
      text: "here",
      author: "Oskar Finn",
      created_at: at,
      edited_at: at,
      version: 1,
    },
  ],
  tags: [
    { id: id(3), capture: id(1), fault_tag: id(4), anchor: { kind: "whole" }, remark: "", author: "Wanda Gill", created_at: at },
  ],
  fault_tags: [
    { id: id(4), name: "noise", key: "6", description: "", retired: false },
    { id: id(5), name: "secret project", key: null, description: "", retired: false },
  ],
  roster: [
    {
      role: "target",
      address: 0x48,
      name: "Tank level",
      tlow_s: null,
      thigh_s: null,
      vol_v: null,
      stretch_allow_s: null,
      registers: "00 level high",
    },
  ],
  profile: null,
  created_at: at,
  updated_at: at,
};

describe("redact", () => {
  const { file: told, removed } = redact(file);

  it("takes out people, registers and unused fault tags, and says so", () => {
    const text = JSON.stringify(told);
    for (const inside of ["Tomas Fry", "Wanda Gill", "Oskar Finn", "level high", "secret project", "assignee"]) {
      expect(text).not.toContain(inside);
    }
    expect(removed).toEqual(["who the case is assigned to", "the names of authors", "register descriptions of the roster"]);
  });

  it("keeps what the case says", () => {
    expect(told).toMatchObject({ title: "Tank 4", finding: "The pump controller yields.", notes: [{ number: 1, text: "here" }] });
    expect(CaseFileSchema.omit({ assignee: true }).parse(told)).toEqual(told);
  });

  it("changes nothing of what it was given", () => {
    expect(file.notes[0].author).toBe("Oskar Finn");
    expect(redact(file).file).toEqual(told);
  });
});

describe("the ladder of stored versions", () => {
  const schema = z.object({ version: z.literal(3), words: z.array(z.string()) });
  const steps: Step[] = [
    (older) => ({ version: 2, word: String(older.text) }),
    (older) => ({ version: 3, words: [String(older.word)] }),
  ];
  const read = (stored: unknown) => climb("thing", stored, steps, schema);

  it("climbs from every version to this one", () => {
    for (const stored of [
      { version: 1, text: "a" },
      { version: 2, word: "a" },
      { version: 3, words: ["a"] },
    ]) {
      expect(read(stored)).toEqual({ ok: true, value: { version: 3, words: ["a"] } });
    }
  });

  it("refuses the future, no version, and what does not fit", () => {
    const message = (stored: unknown) => {
      const answer = read(stored);
      return answer.ok ? "" : answer.problem.message;
    };
    expect(message({ version: 4, words: [] })).toBe("The stored thing is of version 4; this program knows versions up to 3.");
    expect(message({ words: [] })).toBe("The stored thing names no version.");
    expect(message({ version: 0 })).toBe("The stored thing names no version.");
    expect(message("text")).toBe("The stored thing is not an object.");
    expect(message({ version: 3, words: "a" })).toBe("The stored thing does not fit version 3.");
  });

  it("reads the settings of today", () => {
    expect(upgradeSettings(defaultSettings)).toEqual({ ok: true, value: defaultSettings });
  });
});

describe("what people write", () => {
  it("is kept as written, with line ends made equal and no NUL", () => {
    expect(FindingSchema.parse("a\r\nb\rc\u0000d")).toBe("a\nb\ncd");
    expect(TitleSchema.parse("  Pump\t2 \n stalls ")).toBe("Pump 2 stalls");
    fc.assert(
      fc.property(fc.string({ unit: "binary", maxLength: 300 }), (text) => {
        const kept = FindingSchema.parse(text);
        expect(kept).not.toMatch(/\0|\r/);
        expect(FindingSchema.parse(kept)).toBe(kept);
      }),
    );
    expect(NoteTextSchema.safeParse(" \n\t").success).toBe(false);
  });

  it("names files without folders", () => {
    expect(FileNameSchema.parse("C:\\captures\\run 1.csv")).toBe("run 1.csv");
    expect(FileNameSchema.parse("../../etc/passwd")).toBe("passwd");
    expect(FileNameSchema.safeParse("captures/").success).toBe(false);
  });
});

describe("the limits of the protocol", () => {
  it("fit any allowed file into the parts that storage allows", () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: UPLOAD_LIMIT.size }), (size) => {
        const part = partSize(size);
        expect(part).toBeGreaterThanOrEqual(5 * 1_048_576);
        expect(Math.ceil(size / part)).toBeLessThanOrEqual(UPLOAD_LIMIT.parts);
      }),
    );
    expect(Math.ceil(2 ** 40 / partSize(2 ** 40))).toBeLessThanOrEqual(UPLOAD_LIMIT.parts);
  });

  it("give each default fault tag a key of its own", () => {
    const keys = defaultFaultTags.map((tag) => tag.key);
    expect(new Set(keys).size).toBe(keys.length);
  });

  it("take an anchor only where it means something", () => {
    expect(AnchorSchema.safeParse({ kind: "range", from_tick: 5, to_tick: 5 }).success).toBe(true);
    for (const wrong of [
      { kind: "range", from_tick: 5, to_tick: 4 },
      { kind: "range", from_tick: 0.5, to_tick: 4 },
      { kind: "range", from_tick: 0, to_tick: 2 ** 60 },
      { kind: "transaction", transaction: -1 },
      { kind: "elsewhere" },
    ]) {
      expect(AnchorSchema.safeParse(wrong).success).toBe(false);
    }
  });

  it("take a view as the address bar writes it", () => {
    expect(ViewStateSchema.parse("at=0.1&text=%C2%B5")).toBe("at=0.1&text=%C2%B5");
    expect(ViewStateSchema.safeParse("at=0 1").success).toBe(false);
    expect(CaseQuerySchema.parse({ status: "open,closed" }).status).toEqual(["open", "closed"]);
    expect(CaseQuerySchema.parse({})).toEqual({ q: "", status: [], assignee: "", verdict: "", sort: "updated", page: 1 });
  });

  it("drop what the reader does not know of choices", () => {
    expect(ReadSchema.parse({ scl: "@2", sda: "@3", colour: "red" })).toEqual({ scl: "@2", sda: "@3" });
  });
});

describe("the settings of an analysis", () => {
  const capture = { read: { scl: "@2", sda: "@3" }, log: "0.5,C1,arbitration lost\n" };

  it("come from the case and the capture", () => {
    const limits = { kind: "built-in", name: "Fast-mode" } as const;
    expect(analysisSettings({ ...file, settings: { ...file.settings, limits, cb_pf: 200 } }, capture)).toEqual({
      read: capture.read,
      limits: "Fast-mode",
      cb_pf: 200,
      roster: file.roster,
      log: [{ time_s: 0.5, controller: "C1", message: "arbitration lost" }],
    });
  });

  it("name a team's profile with the version the case was judged by", () => {
    const limits = { kind: "team", profile: id(7), version: 3 } as const;
    const profile = { name: "ours", version: 3, base: "Fast-mode", changes: { "tSU;DAT": { min: 150 } } };
    expect(analysisSettings({ ...file, profile, settings: { ...file.settings, limits } }, capture).limits).toEqual({
      format: "firstlow.limits/1",
      name: "ours",
      version: 3,
      base: "Fast-mode",
      limits: { "tSU;DAT": { min: 150 } },
    });
  });

  it("leave the mode to the capture where nothing was chosen", () => {
    expect(analysisSettings(file, { read: {}, log: null })).toMatchObject({ limits: null, log: [] });
  });
});
