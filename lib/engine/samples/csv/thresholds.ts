// In: the level clusters of the surveyed columns and the person's choices. Out: VDD, VIL and VIH (UM10204 table 9: 0.3 and
// 0.7 VDD), per column where a column has its own scale.

import type { Warning } from "../../../base/result";
import type { ReadChoices } from "../reader";
import type { Thresholds } from "./comparator";
import type { Clusters } from "./levels";
import { isDigital, type LineSource } from "./lines";

const LOW_SHARE = 0.3;
const HIGH_SHARE = 0.7;
/** Part of the swing that a settled sample may differ from the one a settling window earlier, at least. */
const SETTLE_SHARE = 0.02;

export interface JudgedLevels {
  readonly levels: "digital" | "volts";
  readonly vdd_v: number | null;
  readonly vil_v: number | null;
  readonly vih_v: number | null;
  readonly scl: Thresholds;
  readonly sda: Thresholds;
  readonly warnings: readonly Warning[];
}

export interface LevelPlan {
  readonly columns: ReadonlyMap<number, Thresholds>;
  /** Thresholds of a chosen pair: one VDD for both lines of a bus. */
  judge(scl: LineSource, sda: LineSource): JudgedLevels;
}

const UNIT_LINE: Thresholds = { vil: LOW_SHARE, vih: HIGH_SHARE, settle: 0 };

export function levelPlan(
  sources: readonly LineSource[],
  clusters: ReadonlyMap<number, Clusters | null>,
  choices: ReadChoices,
): LevelPlan {
  const columns = new Map<number, Thresholds>();
  const volts = sources.filter((source) => source.channel.kind === "volts");
  const highest = Math.max(0, ...volts.map((source) => clusters.get(source.column.index)?.high ?? 0));
  for (const source of sources) {
    const one = clusters.get(source.column.index);
    if (isDigital(source)) continue;
    if (source.channel.kind === "volts") {
      // A line that never moved is judged by the supply that the others show.
      const found =
        one ?? (highest > 0 || choices.vdd_v !== undefined ? { low: 0, high: choices.vdd_v ?? highest, spread: 0 } : null);
      if (found !== null) columns.set(source.column.index, voltThresholds(found, choices).thresholds);
    } else if (one !== null && one !== undefined) columns.set(source.column.index, ofClusters(one));
  }
  return { columns, judge: (scl, sda) => judge(scl, sda, clusters, columns, choices) };
}

export function thresholdsOf(plan: LevelPlan): ReadonlyMap<number, Thresholds> {
  return plan.columns;
}

function settleOf(clusters: Clusters): number {
  return Math.max((clusters.high - clusters.low) * SETTLE_SHARE, 4 * clusters.spread);
}

function ofClusters(clusters: Clusters): Thresholds {
  const swing = clusters.high - clusters.low;
  return { vil: clusters.low + LOW_SHARE * swing, vih: clusters.low + HIGH_SHARE * swing, settle: settleOf(clusters) };
}

interface VoltLevels {
  readonly thresholds: Thresholds;
  readonly vdd: number;
  readonly offset: boolean;
}

function voltThresholds(clusters: Clusters, choices: ReadChoices): VoltLevels {
  const vdd = choices.vdd_v ?? Math.round(clusters.high * 1000) / 1000;
  const offset = choices.vdd_v === undefined && (clusters.low > LOW_SHARE * vdd || clusters.low < -0.2 * vdd || vdd <= 0);
  const own = offset
    ? ofClusters(clusters)
    : { vil: LOW_SHARE * vdd, vih: HIGH_SHARE * vdd, settle: settleOf({ ...clusters, low: Math.min(clusters.low, 0) }) };
  const thresholds = { vil: choices.vil_v ?? own.vil, vih: choices.vih_v ?? own.vih, settle: own.settle };
  return { thresholds, vdd, offset };
}

function judge(
  scl: LineSource,
  sda: LineSource,
  clusters: ReadonlyMap<number, Clusters | null>,
  columns: ReadonlyMap<number, Thresholds>,
  choices: ReadChoices,
): JudgedLevels {
  if (isDigital(scl) && isDigital(sda)) {
    return { levels: "digital", vdd_v: null, vil_v: null, vih_v: null, scl: UNIT_LINE, sda: UNIT_LINE, warnings: [] };
  }
  const lines = [scl, sda].filter((source) => source.channel.kind === "volts");
  const found = lines
    .map((source) => clusters.get(source.column.index))
    .filter((one): one is Clusters => one !== null && one !== undefined);
  const own = (source: LineSource) => columns.get(source.column.index) ?? UNIT_LINE;
  if (lines.length === 0) {
    const warnings = [
      {
        code: "counts-without-scale",
        message:
          "The readings are converter counts without a scale: levels come from their own two clusters, and no volts are shown.",
      },
    ];
    return { levels: "volts", vdd_v: null, vil_v: null, vih_v: null, scl: own(scl), sda: own(sda), warnings };
  }
  const mean = (values: readonly number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
  const together: Clusters =
    found.length === 0
      ? { low: 0, high: choices.vdd_v ?? 0, spread: 0 }
      : {
          low: Math.max(...found.map((one) => one.low)),
          high: mean(found.map((one) => one.high)),
          spread: Math.max(...found.map((one) => one.spread)),
        };
  const { thresholds, vdd, offset } = voltThresholds(together, choices);
  const warnings: Warning[] = [];
  if (choices.vdd_v === undefined) {
    warnings.push({
      code: "vdd-estimated",
      message: `VDD was estimated as ${vdd.toFixed(2)} V from the two level clusters; VIL ${thresholds.vil.toFixed(2)} V, VIH ${thresholds.vih.toFixed(2)} V.`,
    });
  }
  if (offset) {
    warnings.push({
      code: "levels-offset",
      message: `The low level stands at ${together.low.toFixed(2)} V, so the thresholds were put at 30 % and 70 % of the swing instead of VDD. Check the probe's offset and coupling.`,
    });
  }
  const of = (source: LineSource) => (source.channel.kind === "volts" ? thresholds : own(source));
  return { levels: "volts", vdd_v: vdd, vil_v: thresholds.vil, vih_v: thresholds.vih, scl: of(scl), sda: of(sda), warnings };
}
