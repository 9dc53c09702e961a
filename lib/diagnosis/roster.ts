// In: a roster as CSV text. Out: its entries; and back. Columns in any order: role, name, address_7bit, address_8bit (either is
// enough; both must agree), tlow_s, thigh_s, vol_v, stretch_allow_s, registers.

import { ok, type Problem, type Result, refuse } from "../base/result";
import type { RosterEntry } from "../forensics/contract";
import { hex } from "./format";
import { readCell, tableOf, writtenCell } from "./table";

const COLUMNS = [
  "role",
  "name",
  "address_7bit",
  "address_8bit",
  "tlow_s",
  "thigh_s",
  "vol_v",
  "stretch_allow_s",
  "registers",
] as const;
type ColumnName = (typeof COLUMNS)[number];

export function readRoster(text: string): Result<RosterEntry[]> {
  const table = tableOf(text);
  if (!table.ok) return table;
  const [head, ...records] = table.value;
  if (head === undefined) return refuse(bad(1, "the roster is empty", `a first line with column names: ${COLUMNS.join(",")}`));
  const names = head.cells.map((cell) => cell.toLowerCase());
  const place = (name: ColumnName) => names.indexOf(name);
  if (place("name") < 0) return refuse(bad(head.line, "there is no column called name", `column names: ${COLUMNS.join(",")}`));
  const stranger = names.find((name) => name !== "" && !(COLUMNS as readonly string[]).includes(name));
  if (stranger !== undefined)
    return refuse(bad(head.line, `the column "${stranger}" is not known`, `column names: ${COLUMNS.join(",")}`));
  const entries: RosterEntry[] = [];
  for (const { line, cells } of records) {
    const cell = (name: ColumnName) => (place(name) < 0 ? "" : readCell(cells[place(name)] ?? ""));
    const entry = entryOf(line, cell);
    if (!entry.ok) return entry;
    entries.push(entry.value);
  }
  return ok(entries);
}

function entryOf(line: number, cell: (name: ColumnName) => string): Result<RosterEntry> {
  const role = cell("role").toLowerCase() || "target";
  if (role !== "controller" && role !== "target") return refuse(bad(line, `the role is "${role}"`, "controller or target"));
  const seven = addressOf(cell("address_7bit"));
  const eight = addressOf(cell("address_8bit"));
  if (seven === undefined)
    return refuse(
      bad(line, `"${cell("address_7bit")}" is no address`, "a 7-bit address such as 0x50, or a 10-bit one up to 0x3FF"),
    );
  if (eight === undefined || (eight !== null && eight > 0xff)) {
    return refuse(bad(line, `"${cell("address_8bit")}" is no 8-bit address`, "a value such as 0xA0"));
  }
  if (seven !== null && eight !== null && seven !== eight >> 1) {
    return refuse(
      bad(line, `the two addresses ${hex(seven)} and ${hex(eight)} do not agree`, `${hex(seven << 1)} as the 8-bit form`),
    );
  }
  const numbers: Partial<Record<ColumnName, number | null>> = {};
  for (const name of ["tlow_s", "thigh_s", "vol_v", "stretch_allow_s"] as const) {
    const text = cell(name);
    const value = text === "" ? null : Number(text.replace(",", "."));
    if (value !== null && !(Number.isFinite(value) && value >= 0))
      return refuse(bad(line, `${name} is "${text}"`, "a number that is not negative"));
    numbers[name] = value;
  }
  return ok({
    role,
    address: seven ?? (eight === null ? null : eight >> 1),
    name: cell("name"),
    tlow_s: numbers.tlow_s ?? null,
    thigh_s: numbers.thigh_s ?? null,
    vol_v: numbers.vol_v ?? null,
    stretch_allow_s: numbers.stretch_allow_s ?? null,
    registers: cell("registers"),
  });
}

// null: nothing written; undefined: not an address.
function addressOf(text: string): number | null | undefined {
  if (text === "") return null;
  if (!/^(0x[0-9a-f]{1,3}|\d{1,4})$/i.test(text)) return undefined;
  const value = Number(text);
  return value <= 0x3ff ? value : undefined;
}

export function writeRoster(entries: readonly RosterEntry[]): string {
  const lines = entries.map((entry) => {
    const seven = entry.address === null ? "" : hex(entry.address);
    const eight = entry.address === null || entry.address > 0x7f ? "" : hex(entry.address << 1);
    const figure = (value: number | null) => (value === null ? "" : String(value));
    const cells = [
      entry.role,
      entry.name,
      seven,
      eight,
      figure(entry.tlow_s),
      figure(entry.thigh_s),
      figure(entry.vol_v),
      figure(entry.stretch_allow_s),
      entry.registers,
    ];
    return cells.map(writtenCell).join(",");
  });
  return `${[COLUMNS.join(","), ...lines].join("\r\n")}\r\n`;
}

function bad(line: number, what: string, expected: string): Problem {
  return {
    code: "bad-roster",
    message: `Line ${line} of the roster: ${what}.`,
    advice: `Expected ${expected}.`,
    place: { line },
  };
}
