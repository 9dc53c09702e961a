import "server-only";
import type { Timebase } from "@/lib/base/time";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import { analyze } from "@/lib/diagnosis/analyze";
import type { Summary } from "@/lib/diagnosis/report";
import { TransactionStore } from "@/lib/diagnosis/transaction";
import type { Opened } from "@/lib/engine/samples/reader";
import { Refusal } from "@/lib/server/http/problem";

/** What the server itself read from a stored capture or archive. */
export interface Reading {
  readonly summary: Summary;
  readonly timebase: Timebase;
  readonly attribution: Int16Array;
  readonly transactions: TransactionStore;
}

/** Analyses an opened capture; one that cannot be read is a refusal in the reader's own words. */
export async function read(opened: Opened, settings: AnalysisSettings): Promise<Reading> {
  if (!opened.ok) throw unreadable(opened.problem);
  const transactions = new TransactionStore();
  const outcome = await analyze(opened.value, settings, {
    passing: true,
    head() {},
    edges() {},
    tap() {},
    transactions: (block, bytes) => transactions.add(block, bytes),
    progress() {},
  });
  if (!outcome.ok) throw unreadable(outcome.problem);
  return {
    summary: outcome.summary,
    timebase: opened.value.head.timebase,
    attribution: outcome.attribution,
    transactions,
  };
}

function unreadable({ message, advice }: { readonly message: string; readonly advice: string }): Refusal {
  return new Refusal("unreadable", { words: `${message} ${advice}` });
}
