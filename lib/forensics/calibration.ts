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
      claims: 37,
      stated: 0.4436,
      real: 0.8919,
    },
    {
      from: 0.5,
      to: 0.6,
      claims: 21,
      stated: 0.5517,
      real: 0.8095,
    },
    {
      from: 0.6,
      to: 0.7,
      claims: 28,
      stated: 0.651,
      real: 0.8571,
    },
    {
      from: 0.7,
      to: 0.8,
      claims: 39,
      stated: 0.7474,
      real: 0.9231,
    },
    {
      from: 0.8,
      to: 0.9,
      claims: 51,
      stated: 0.8585,
      real: 0.9412,
    },
    {
      from: 0.9,
      to: 0.95,
      claims: 45,
      stated: 0.9278,
      real: 0.9111,
    },
    {
      from: 0.95,
      to: 0.99,
      claims: 152,
      stated: 0.9756,
      real: 0.9803,
    },
    {
      from: 0.99,
      to: 1,
      claims: 2187,
      stated: 0.9987,
      real: 0.9968,
    },
  ],
  ece: 0.0174,
  roc: [
    {
      threshold: 0.4,
      found: 0.6133,
      falsePer2000: 0.7874,
    },
    {
      threshold: 0.5,
      found: 0.6053,
      falsePer2000: 0.7045,
    },
    {
      threshold: 0.7,
      found: 0.5953,
      falsePer2000: 0.4144,
    },
    {
      threshold: 0.9,
      found: 0.575,
      falsePer2000: 0.2072,
    },
    {
      threshold: 0.95,
      found: 0.565,
      falsePer2000: 0.1243,
    },
    {
      threshold: 0.99,
      found: 0.5289,
      falsePer2000: 0.0829,
    },
  ],
  visible: {
    contests: 2486,
    found: 0.9598,
    exactBit: 0.9577,
    bothParties: 0.9388,
  },
  visiblePairs: {
    contests: 2262,
    found: 0.9624,
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
    given: 0.9936,
    right: 0.9948,
  },
  controllersRight: 0.9,
};
