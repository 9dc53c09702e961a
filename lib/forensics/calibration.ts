// In: nothing. Out: the figures of the last calibration run, for the help page. Written by fixtures/calibration/run.ts; do not edit.

import type { CalibrationFigures } from "./calibration-figures";

export const CALIBRATION: CalibrationFigures = {
  corpus: {
    first: 1001,
    count: 300,
  },
  captures: 300,
  transactions: 58201,
  contests: 4773,
  reliability: [
    {
      from: 0.4,
      to: 0.5,
      claims: 38,
      stated: 0.4388,
      real: 0.7895,
    },
    {
      from: 0.5,
      to: 0.6,
      claims: 25,
      stated: 0.5496,
      real: 0.8,
    },
    {
      from: 0.6,
      to: 0.7,
      claims: 26,
      stated: 0.6457,
      real: 0.8462,
    },
    {
      from: 0.7,
      to: 0.8,
      claims: 46,
      stated: 0.7478,
      real: 0.8043,
    },
    {
      from: 0.8,
      to: 0.9,
      claims: 57,
      stated: 0.8577,
      real: 0.8596,
    },
    {
      from: 0.9,
      to: 0.95,
      claims: 47,
      stated: 0.9279,
      real: 0.8936,
    },
    {
      from: 0.95,
      to: 0.99,
      claims: 153,
      stated: 0.9752,
      real: 0.9739,
    },
    {
      from: 0.99,
      to: 1,
      claims: 2190,
      stated: 0.9988,
      real: 0.9968,
    },
  ],
  ece: 0.0131,
  roc: [
    {
      threshold: 0.4,
      found: 0.6143,
      falsePer2000: 1.5334,
    },
    {
      threshold: 0.5,
      found: 0.607,
      falsePer2000: 1.2847,
    },
    {
      threshold: 0.7,
      found: 0.5968,
      falsePer2000: 0.9532,
    },
    {
      threshold: 0.9,
      found: 0.5759,
      falsePer2000: 0.2901,
    },
    {
      threshold: 0.95,
      found: 0.5657,
      falsePer2000: 0.1658,
    },
    {
      threshold: 0.99,
      found: 0.5296,
      falsePer2000: 0.0829,
    },
  ],
  visible: {
    contests: 2494,
    found: 0.9583,
    exactBit: 0.9577,
    bothParties: 0.9389,
  },
  visiblePairs: {
    contests: 2270,
    found: 0.9608,
    exactBit: 0.9798,
    bothParties: 0.9766,
  },
  tapped: {
    contests: 651,
    found: 0.9094,
    exactBit: 0.9048,
    false: 1,
  },
  attribution: {
    given: 0.9937,
    right: 0.9949,
  },
  controllersRight: 0.9,
};
