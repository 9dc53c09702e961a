import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { RosterEntry } from "@/lib/forensics/contract";

// The sample of the front door: one of the demo captures (fixtures/demo/captures.ts) and what is known about its bus.

export const SAMPLE_NAME = "tank4-valve-write.csv.gz";
export const SAMPLE_TITLE = "Valve write repeated now and then";

/** The sample's address; the file itself is built into the application. */
export const SAMPLE_URL = new URL("./sample.csv.gz", import.meta.url);

function controller(name: string, tlow_s: number, thigh_s: number): RosterEntry {
  return { role: "controller", address: null, name, tlow_s, thigh_s, vol_v: null, stretch_allow_s: null, registers: "" };
}

function target(address: number, name: string, stretch_allow_s: number | null, registers: string): RosterEntry {
  return { role: "target", address, name, tlow_s: null, thigh_s: null, vol_v: null, stretch_allow_s, registers };
}

export const SAMPLE_SETTINGS: AnalysisSettings = {
  read: {},
  limits: null,
  cb_pf: null,
  roster: [
    controller("Pump controller", 5.15e-6, 4.8e-6),
    controller("Gateway", 5.75e-6, 4.4e-6),
    target(0x48, "Tank level", null, "00 level high;01 level low"),
    target(0x20, "Valve port", 40e-6, "06 direction;02 outputs"),
    target(0x50, "Feed log", null, "00 next entry"),
    target(0x3d, "Oxygen probe", null, "10 saturation"),
  ],
  log: [],
};
