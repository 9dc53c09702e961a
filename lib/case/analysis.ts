// In: a case and one of its captures. Out: the settings under which the analysis reads it: the same for the page, a share
// link, the demo and the report download, so that their numbers are the same.

import type { AnalysisSettings } from "../diagnosis/analysis";
import { readLog } from "../diagnosis/log";
import { PROFILE_FORMAT } from "../diagnosis/profile-file";
import type { ReadChoices } from "../engine/samples/reader";
import type { CaseFile } from "./case";

type Judged = Pick<CaseFile, "settings" | "roster" | "profile">;

/** What the case says about how this capture is read and judged. */
export function analysisSettings(
  file: Judged,
  capture: { readonly read: ReadChoices; readonly log: string | null },
): AnalysisSettings {
  const log = capture.log === null ? null : readLog(capture.log);
  return {
    read: capture.read,
    limits: limitsOf(file),
    cb_pf: file.settings.cb_pf,
    roster: file.roster,
    // A log that cannot be read was refused when it was imported.
    log: log?.ok ? log.value : [],
  };
}

function limitsOf({ settings: { limits }, profile }: Judged): AnalysisSettings["limits"] {
  switch (limits.kind) {
    case "automatic":
      return null;
    case "built-in":
      return limits.name;
    case "team":
      // A version that is gone cannot be judged by; the mode is then found from the capture.
      return profile === null
        ? null
        : { format: PROFILE_FORMAT, name: profile.name, version: profile.version, base: profile.base, limits: profile.changes };
  }
}
