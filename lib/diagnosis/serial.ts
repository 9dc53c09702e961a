// In: a summary and the transactions one by one. Out: the report as JSON text in pieces, so that it never stands in memory whole.

import type { Report, Summary } from "./report";
import type { ReportTransaction } from "./transaction";

const PIECE = 1 << 16;

export function* reportJson(summary: Summary, transactions: Iterable<ReportTransaction>): Generator<string> {
  const { schema, capture, transactionCount: _, ...rest } = summary;
  let piece = `{"schema":${JSON.stringify(schema)},"capture":${JSON.stringify(capture)},"transactions":[`;
  let first = true;
  for (const transaction of transactions) {
    piece += `${first ? "\n" : ",\n"}${JSON.stringify(transaction)}`;
    first = false;
    if (piece.length < PIECE) continue;
    yield piece;
    piece = "";
  }
  yield `${piece}]`;
  for (const [key, value] of Object.entries(rest)) {
    if (value === undefined) continue;
    yield* Array.isArray(value) ? listJson(key, value) : [`,\n${JSON.stringify(key)}:${JSON.stringify(value)}`];
  }
  yield "}\n";
}

function* listJson(key: string, list: readonly unknown[]): Generator<string> {
  let piece = `,\n${JSON.stringify(key)}:[`;
  for (const [i, entry] of list.entries()) {
    piece += `${i === 0 ? "\n" : ",\n"}${JSON.stringify(entry)}`;
    if (piece.length < PIECE) continue;
    yield piece;
    piece = "";
  }
  yield `${piece}]`;
}

/** The whole report as an object, for captures small enough to hold. */
export function wholeReport(summary: Summary, transactions: Iterable<ReportTransaction>): Report {
  const { transactionCount: _, ...rest } = summary;
  return { ...rest, transactions: [...transactions] };
}
