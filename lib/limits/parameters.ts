// In: nothing. Out: the parameters measured, between which points, and in which column each stands.

/** Why a parameter has no figure, or how a figure is to be read. */
export interface Parameter {
  readonly symbol: string;
  /** From and to, as REFERENCE 1.6 of the published readings of UM10204 Figure 38. */
  readonly points: string;
  /** Needs the analogue shape of an edge; a logic-level capture can never show it. */
  readonly volts: boolean;
}

const points = (symbol: string, text: string, volts = false): Parameter => ({ symbol, points: text, volts });

export const PERIOD = points("fSCL", "SCL fall 30 % to next SCL fall 30 %, given as the period");
export const LOW = points("tLOW", "SCL fall 30 % to SCL rise 30 %");
export const HIGH = points("tHIGH", "SCL rise 70 % to SCL fall 70 %");
export const HD_STA = points("tHD;STA", "SDA fall 30 % to SCL fall 70 %");
export const SU_STA = points("tSU;STA", "SCL rise 70 % to SDA fall 70 %, repeated START only");
export const SU_STO = points("tSU;STO", "SCL rise 70 % to SDA rise 30 %");
export const BUF = points("tBUF", "SDA rise 70 % (STOP) to SDA fall 70 % (START)");
export const SU_DAT = points("tSU;DAT", "SDA settled to SCL rise 30 %");
export const HD_DAT = points("tHD;DAT", "SCL fall 30 % to SDA leaving its level (rise 30 %, fall 70 %)");
export const VD_DAT = points("tVD;DAT", "SCL fall 30 % to SDA settled, bits 0 to 7, lows that are not stretched");
export const VD_ACK = points("tVD;ACK", "SCL fall 30 % to SDA settled, ninth bit, lows that are not stretched");
export const RISE = points("tr", "30 % to 70 %, SCL and SDA", true);
export const FALL = points("tf", "70 % to 30 %, SCL and SDA", true);
export const SPIKE = points("tSP", "width of pulses that the input filter takes out");
export const TIMEOUT = points("tTIMEOUT", "one SCL low: SCL fall 30 % to SCL rise 30 %");
export const SEXT = points("tLOW:SEXT", "sum of the stretching by targets from START to STOP");
export const MEXT = points("tLOW:MEXT", "sum of the stretching by the controller within one byte");

/** Hs-mode prints rise and fall per line. */
export const HS_EDGES = {
  sclRise: points("trCL", "SCLH 30 % to 70 %", true),
  sclRise1: points("trCL1", "SCLH 30 % to 70 %, first rise after Sr and after each acknowledge bit", true),
  sclFall: points("tfCL", "SCLH 70 % to 30 %", true),
  sdaRise: points("trDA", "SDAH 30 % to 70 %", true),
  sdaFall: points("tfDA", "SDAH 70 % to 30 %", true),
} as const;

/** Other names that a table gives to one of these parameters. */
const NAMES: Readonly<Record<string, readonly string[]>> = { fSCL: ["fSCL", "fSMB", "fSCLH"], tSP: ["tSP", "tSPIKE"] };

/** The symbol under which a table lists the parameter, or null where it does not. */
export function listedAs(symbol: string, table: Readonly<Record<string, unknown>>): string | null {
  for (const name of NAMES[symbol] ?? [symbol]) if (table[name] !== undefined) return name;
  return null;
}
