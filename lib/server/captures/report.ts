import "server-only";
import { Case } from "@/entities/case";
import { analysisSettings } from "@/lib/case/analysis";
import { reportJson } from "@/lib/diagnosis/serial";
import { openCapture } from "@/lib/engine/samples/open";
import type { Viewer } from "@/lib/server/access/viewer";
import { findCapture, visibleCases } from "@/lib/server/access/visible";
import { caseFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { host } from "./host";
import { read } from "./reading";
import { storedSource } from "./source";

/** The report of a capture as JSON: the original read again under the case's settings, exactly as the command prints it. */
export async function reportOf(em: EntityManager, viewer: Viewer, id: string): Promise<Response> {
  const row = await findCapture(em, viewer, id);
  const inCase = await em.findOneOrFail(Case, { $and: [visibleCases(viewer), { id: row.case.id }] });
  const settings = analysisSettings(await caseFile(em, inCase), { read: row.read, log: row.log ?? null });
  const opened = await openCapture(storedSource(row.key, row.name, row.size), host, settings.read);
  const { summary, timebase, attribution, transactions } = await read(opened, settings);
  const pieces = reportJson(summary, transactions.rows(timebase, attribution, summary.controllers));
  return new Response(streamOf(pieces), {
    headers: {
      "content-type": "application/json; charset=utf-8",
      "content-disposition": `attachment; filename="${row.name.replace(/[^\w.-]+/g, "-")}.report.json"`,
      "x-robots-tag": "noindex",
    },
  });
}

/** Text piece by piece, as fast as it is taken. */
function streamOf(pieces: Iterator<string>): ReadableStream<Uint8Array> {
  const encoder = new TextEncoder();
  return new ReadableStream({
    pull(controller) {
      const next = pieces.next();
      if (next.done) controller.close();
      else controller.enqueue(encoder.encode(next.value));
    },
  });
}
