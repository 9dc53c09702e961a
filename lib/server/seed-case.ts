import "server-only";
import { createHash, randomUUID } from "node:crypto";
import type { DemoCapture } from "@/fixtures/demo/captures";
import { type CaptureFile, defaultSettings, type Read, type Status } from "@/lib/case/case";
import type { CaseView } from "@/lib/case/wire";
import type { Contest, Fault } from "@/lib/diagnosis/report";
import { FAULT_WORDS } from "@/lib/diagnosis/wording";
import type { MemberViewer } from "./access/viewer";
import { addCapture } from "./captures/add";
import { analyseOriginal } from "./captures/analysis";
import { store } from "./captures/store";
import { createCase, editCase } from "./cases/write";
import { fork } from "./database";
import { addNote } from "./notes/write";
import type { DemoPeople } from "./seed";
import { createShare } from "./shares/write";
import { readCatalogue } from "./tags/catalogue";
import { changeTags } from "./tags/write";

type Summary = NonNullable<CaptureFile["summary"]>;

/** Places that are tagged in one demo case; a real technician would go on. */
const TAGGED = 6;

/** One demo case: the capture stored and read, then worked on the way the team would, from what the reading found. */
export async function seedCase(people: DemoPeople, roster: string, demo: DemoCapture, at: number): Promise<void> {
  const made = await createCase(await fork(), people.technician, {
    title: demo.title,
    settings: { ...defaultSettings, roster },
  });
  const stored = await deposit(people.technician, made, demo);
  const capture = await analyseOriginal(await fork(), people.technician, stored, { read: readOf(demo), log: demo.log });
  await addNote(await fork(), people.technician, made.number, {
    capture: capture.id,
    anchor: { kind: "whole" },
    text: demo.story,
  });
  if (capture.summary) await work(people, made, capture, capture.summary, at);
}

/** Puts the file where an upload would have put it. */
async function deposit(viewer: MemberViewer, inCase: CaseView, demo: DemoCapture): Promise<string> {
  const key = `teams/${viewer.team.id}/captures/${randomUUID()}/original`;
  await store().put(key, demo.bytes);
  const sha256 = createHash("sha256").update(demo.bytes).digest("hex");
  const em = await fork();
  const file = { name: demo.file, size: demo.bytes.byteLength, sha256, key, read: readOf(demo) };
  const capture = await em.transactional((tx) => addCapture(tx, viewer, inCase.id, file));
  return capture.id;
}

/** Drive taps as the command line writes them, `LABEL=SCL,SDA`, as choices of the reader. */
function readOf(demo: DemoCapture): Read {
  if (demo.taps.length === 0) return {};
  const taps = demo.taps.map((word) => {
    const [label, lines] = word.split("=");
    const [scl, sda] = lines.split(",").map((name) => (name === "-" ? null : name));
    return { label, scl, sda, polarity: "release" as const };
  });
  return { taps };
}

async function work(people: DemoPeople, inCase: CaseView, capture: CaptureFile, summary: Summary, at: number): Promise<void> {
  const { number } = inCase;
  await tagPlaces(people.technician, number, capture, summary);
  const [contest] = summary.contests;
  if (contest) await noteContest(people.engineer, number, capture, contest);
  else if (summary.faults.length > 0) await noteFault(people.engineer, number, capture, summary.faults[0]);
  if (at === 0) await askAndShare(people, number);
  const status: Status = contest
    ? "in-work"
    : summary.verdict === "pass"
      ? "closed"
      : summary.verdict === "fail"
        ? "answered"
        : "open";
  await editCase(await fork(), people.engineer, number, {
    version: inCase.version,
    status,
    assignee: status === "closed" ? null : people.engineer.user.id,
    finding: findingOf(summary),
  });
}

async function askAndShare(people: DemoPeople, number: number): Promise<void> {
  await addNote(await fork(), people.support, number, {
    capture: null,
    anchor: { kind: "whole" },
    text: "The customer asks whether the valve can miss a command because of this. Can we answer that from the capture?",
  });
  await createShare(await fork(), people.engineer, number, {
    label: "Valve port supplier",
    expires_in_days: 90,
    passphrase: null,
    raw_allowed: false,
    view: "",
  });
}

async function tagPlaces(viewer: MemberViewer, number: number, capture: CaptureFile, summary: Summary): Promise<void> {
  const catalogue = await readCatalogue(await fork(), viewer);
  const idOf = (name: string) => catalogue.find((tag) => tag.name === name)?.id;
  const wishes: [string, number | null][] = [
    ...summary.contests.map((contest): [string, number] => ["lost arbitration", contest.transaction]),
    ...summary.faults.map((fault): [string, number | null] => [tagName(fault), fault.transaction]),
  ];
  const add = wishes.flatMap(([name, transaction]) => {
    const fault_tag = idOf(name);
    if (transaction === null || fault_tag === undefined) return [];
    return [{ capture: capture.id, fault_tag, anchor: { kind: "transaction" as const, transaction }, remark: "" }];
  });
  if (add.length > 0) await changeTags(await fork(), viewer, number, { add: add.slice(0, TAGGED), remove: [] });
}

function tagName(fault: Fault): string {
  switch (fault.kind) {
    case "address-nack":
    case "data-nack":
      return "not acknowledged";
    case "scl-stuck-low":
    case "sda-stuck-low":
    case "bus-clear":
      return "stuck line";
    case "spike":
      return "noise";
    case "slow-rise":
    case "low-swing":
    case "between-thresholds":
    case "smbus-timeout":
      return "outside limits";
    default:
      return "broken message";
  }
}

async function noteContest(viewer: MemberViewer, number: number, capture: CaptureFile, contest: Contest): Promise<void> {
  const yielded = contest.yielded ?? "The other controller";
  const retry = contest.retry === null ? "" : ` The same bytes come again in transaction ${contest.retry}.`;
  await addNote(await fork(), viewer, number, {
    capture: capture.id,
    anchor: { kind: "transaction", transaction: contest.transaction },
    text: `${yielded} yields at byte ${contest.byte}, bit ${contest.bit}.${retry} Nothing is lost on the wire; its driver has to send again.`,
  });
}

async function noteFault(viewer: MemberViewer, number: number, capture: CaptureFile, fault: Fault): Promise<void> {
  await addNote(await fork(), viewer, number, {
    capture: capture.id,
    anchor: fault.transaction === null ? { kind: "whole" } : { kind: "transaction", transaction: fault.transaction },
    text: `First seen here: ${fault.detail}`,
  });
}

/** Made of what the reading says, so that the demo never claims more than its capture shows. `#` and a number cite a transaction. */
function findingOf(summary: Summary): string {
  const contest = summary.contests.find(({ retry }) => retry !== null) ?? summary.contests[0];
  if (contest !== undefined) {
    const n = summary.contests.length;
    const retry = contest.retry === null ? "" : ` and its retry #${contest.retry}`;
    return [
      `Not a bus fault. The two controllers met ${n} ${n === 1 ? "time" : "times"} in this record, and each time the one that sent a high where the bus stayed low let go; see #${contest.transaction}${retry}.`,
      "A lost arbitration is an attempt to be made again, not a write that was lost: the driver should count acknowledged writes.",
    ].join("\n\n");
  }
  const fault = summary.faults.find(({ kind }) => FAULT_WORDS[kind].fails);
  if (fault !== undefined) {
    const where = fault.transaction === null ? "" : `, first in #${fault.transaction}`;
    return `${FAULT_WORDS[fault.kind].title}${where}: ${fault.detail}.\n\n${FAULT_WORDS[fault.kind].advice}`;
  }
  return summary.lede?.at(-1) ?? "";
}
