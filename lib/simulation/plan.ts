// In: what differs from an ordinary bus. Out: complete plans for lib/simulation/scenario.ts. The ordinary bus: 100 kHz, 3.3 V,
// 2.2 kohm, 60 pF, both lines quick.

import type { ControllerPlan, Habit, Scenario, TargetPlan, WirePlan } from "./scenario";

export const HABIT: Habit = {
  tlow_s: 5.0e-6,
  thigh_s: 4.6e-6,
  hdsta_s: 4.4e-6,
  susta_s: 5.0e-6,
  susto_s: 4.5e-6,
  buf_s: 5.5e-6,
  dataFall_s: 0.6e-6,
  dataRise_s: 0.6e-6,
  sample_s: 0.1e-6,
  pause_s: 0,
  pauseSpread_s: 0,
  jitter_s: 3e-9,
};

export const WIRE: WirePlan = {
  vdd_v: 3.3,
  pullup_ohm: 2200,
  sclCapacitance_f: 60e-12,
  sdaCapacitance_f: 60e-12,
  filter_s: 50e-9,
};

export function controller(
  label: string,
  habit: Partial<Habit>,
  plan: Partial<Omit<ControllerPlan, "habit">> = {},
): ControllerPlan {
  return {
    label,
    habit: { ...HABIT, ...habit },
    drive_ohm: 30,
    commit_s: 2e-6,
    afterLoss: "leave",
    retryLoss: { after_s: [0, 0], limit: 3 },
    retryNack: null,
    jobs: [],
    ...plan,
  };
}

export function target(label: string, address: number, plan: Partial<TargetPlan> = {}): TargetPlan {
  return {
    label,
    address,
    drive_ohm: 40,
    ackDelay_s: 0.4e-6,
    releaseDelay_s: 0.4e-6,
    dataDelay_s: 0.5e-6,
    stretch: [],
    data: [0x5a],
    refuse: 0,
    lateAck: 0,
    lateRelease: 0,
    arbitrates: false,
    ...plan,
  };
}

export function scenario(seed: number, until_s: number, parts: Partial<Scenario>): Scenario {
  return { seed, until_s, wire: WIRE, controllers: [], targets: [], disturbances: [], ...parts };
}
