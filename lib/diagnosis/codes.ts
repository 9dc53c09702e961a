// In: an error code or flag as a driver reports it. Out: what condition on the wires sets it.

export interface CodeMeaning {
  readonly code: string;
  readonly meaning: string;
  readonly source: string;
}

interface Known extends CodeMeaning {
  readonly number: number;
}

const FAULT_CODES = "Linux Documentation/i2c/fault-codes.rst";

/** Numbers as in asm-generic. */
const CODES: readonly Known[] = [
  {
    code: "EAGAIN",
    number: 11,
    meaning: "arbitration lost while transmitting, or the bus was in use in atomic context",
    source: FAULT_CODES,
  },
  { code: "ENXIO", number: 6, meaning: "no acknowledge in the address phase", source: FAULT_CODES },
  { code: "EBADMSG", number: 74, meaning: "PEC wrong on a read", source: FAULT_CODES },
  { code: "EBUSY", number: 16, meaning: "the bus was busy for too long", source: FAULT_CODES },
  { code: "ETIMEDOUT", number: 110, meaning: "time-out, for instance stretching beyond SMBus's limit", source: FAULT_CODES },
  {
    code: "EPROTO",
    number: 71,
    meaning: "a target broke the protocol, for instance a block count outside 1 to 32",
    source: FAULT_CODES,
  },
  { code: "ESHUTDOWN", number: 108, meaning: "the adapter is suspended", source: FAULT_CODES },
  { code: "EIO", number: 5, meaning: "a failure that the driver does not name", source: FAULT_CODES },
  { code: "EREMOTEIO", number: 121, meaning: "in older drivers: no acknowledge", source: "from memory, not read" },
];

const FLAGS: readonly (readonly [RegExp, string])[] = [
  [
    /\barb(itration)?[ _-]*(was )?lost\b|\barlo\b|\blost arbitration\b/i,
    "the controller had released SDA and read it low while SCL was high",
  ],
  [/\bberr\b|\bbus error\b/i, "the controller saw a START or STOP where a bit was due"],
  [/\bno ?ack\b|\bnack\b|\bnak\b|\backnowledge failure\b/i, "the receiver left SDA high on the ninth clock"],
  [/\btime[ -]?d? ?out\b/i, "SCL or the bus was held for longer than the driver waits"],
];

/** Meanings of every code or flag named in a message: "EAGAIN", "-11", "error -110", "ARLO". */
export function explainCode(message: string): CodeMeaning[] {
  const found: CodeMeaning[] = [];
  for (const { code, number, meaning, source } of CODES) {
    const named = new RegExp(`\\b${code}\\b|(?:^|[\\s(=:])-${number}(?!\\d|\\.)`).test(message);
    if (named) found.push({ code, meaning, source });
  }
  for (const [pattern, meaning] of FLAGS) {
    const flag = pattern.exec(message);
    if (flag !== null)
      found.push({ code: flag[0], meaning, source: "the definition that controllers share (UM10204 3.1.8, 3.1.6)" });
  }
  return found;
}

/** Each code or flag that the messages name, once, in the order in which it first appears. */
export function codesIn(messages: Iterable<string>): CodeMeaning[] {
  const found = new Map<string, CodeMeaning>();
  for (const message of messages)
    for (const entry of explainCode(message)) if (!found.has(entry.code)) found.set(entry.code, entry);
  return [...found.values()];
}
