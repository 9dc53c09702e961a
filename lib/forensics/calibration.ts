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
      from: 0.2,
      to: 0.3,
      claims: 104,
      stated: 0.2437,
      real: 0.5769,
    },
    {
      from: 0.3,
      to: 0.4,
      claims: 61,
      stated: 0.3504,
      real: 0.7705,
    },
    {
      from: 0.4,
      to: 0.5,
      claims: 48,
      stated: 0.4507,
      real: 0.8125,
    },
    {
      from: 0.5,
      to: 0.6,
      claims: 41,
      stated: 0.5492,
      real: 0.6829,
    },
    {
      from: 0.6,
      to: 0.7,
      claims: 38,
      stated: 0.6457,
      real: 0.9211,
    },
    {
      from: 0.7,
      to: 0.8,
      claims: 40,
      stated: 0.7501,
      real: 0.875,
    },
    {
      from: 0.8,
      to: 0.9,
      claims: 64,
      stated: 0.859,
      real: 0.8594,
    },
    {
      from: 0.9,
      to: 0.95,
      claims: 77,
      stated: 0.9293,
      real: 0.9351,
    },
    {
      from: 0.95,
      to: 0.99,
      claims: 163,
      stated: 0.9727,
      real: 0.9755,
    },
    {
      from: 0.99,
      to: 1,
      claims: 2215,
      stated: 0.9987,
      real: 0.9734,
    },
  ],
  ece: 0.0546,
  roc: [
    {
      threshold: 0.2,
      found: 0.6516,
      falsePer2000: 6.838,
    },
    {
      threshold: 0.3,
      found: 0.6371,
      falsePer2000: 5.0145,
    },
    {
      threshold: 0.5,
      found: 0.6162,
      falsePer2000: 4.0613,
    },
    {
      threshold: 0.7,
      found: 0.6009,
      falsePer2000: 3.3983,
    },
    {
      threshold: 0.9,
      found: 0.5791,
      falsePer2000: 2.8181,
    },
    {
      threshold: 0.95,
      found: 0.5616,
      falsePer2000: 2.6109,
    },
    {
      threshold: 0.99,
      found: 0.523,
      falsePer2000: 2.4451,
    },
  ],
  visible: {
    contests: 2459,
    found: 0.9768,
    exactBit: 0.9571,
    bothParties: 0.9384,
  },
  visiblePairs: {
    contests: 2238,
    found: 0.9808,
    exactBit: 0.9809,
    bothParties: 0.9786,
  },
  tapped: {
    contests: 651,
    found: 0.9094,
    exactBit: 0.9063,
    false: 38,
  },
  attribution: {
    given: 0.9911,
    right: 0.9924,
  },
  controllersRight: 0.9,
};
