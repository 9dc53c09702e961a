// In: nothing. Out: the figures of the last calibration run, for the help page. Written by fixtures/calibration/run.ts; do not edit.

import type { CalibrationFigures } from "./calibration-figures";

export const CALIBRATION: CalibrationFigures = {
  corpus: {
    first: 31001,
    count: 600,
  },
  captures: 600,
  transactions: 119201,
  contests: 11258,
  reliability: [
    {
      from: 0.4,
      to: 0.5,
      claims: 129,
      stated: 0.4464,
      real: 0.7984,
    },
    {
      from: 0.5,
      to: 0.6,
      claims: 53,
      stated: 0.5531,
      real: 0.8679,
    },
    {
      from: 0.6,
      to: 0.7,
      claims: 98,
      stated: 0.6502,
      real: 0.7857,
    },
    {
      from: 0.7,
      to: 0.8,
      claims: 117,
      stated: 0.7558,
      real: 0.906,
    },
    {
      from: 0.8,
      to: 0.9,
      claims: 182,
      stated: 0.8567,
      real: 0.8791,
    },
    {
      from: 0.9,
      to: 0.95,
      claims: 152,
      stated: 0.9276,
      real: 0.9342,
    },
    {
      from: 0.95,
      to: 0.99,
      claims: 368,
      stated: 0.9765,
      real: 0.9565,
    },
    {
      from: 0.99,
      to: 1,
      claims: 5060,
      stated: 0.9986,
      real: 0.9913,
    },
  ],
  ece: 0.0231,
  roc: [
    {
      threshold: 0.4,
      found: 0.6039,
      falsePer2000: 2.761,
    },
    {
      threshold: 0.5,
      found: 0.5936,
      falsePer2000: 2.237,
    },
    {
      threshold: 0.7,
      found: 0.5812,
      falsePer2000: 1.6727,
    },
    {
      threshold: 0.9,
      found: 0.5544,
      falsePer2000: 1.0278,
    },
    {
      threshold: 0.95,
      found: 0.5401,
      falsePer2000: 0.8464,
    },
    {
      threshold: 0.99,
      found: 0.5047,
      falsePer2000: 0.6248,
    },
  ],
  visible: {
    contests: 5717,
    found: 0.9669,
    exactBit: 0.9882,
    bothParties: 0.9788,
  },
  visiblePairs: {
    contests: 5203,
    found: 0.9685,
    exactBit: 0.9889,
    bothParties: 0.9845,
  },
  tapped: {
    contests: 1036,
    found: 1,
    exactBit: 1,
    false: 0,
  },
  untapped: {
    contests: 284,
    found: 0.8486,
    exactBit: 0.8204,
  },
  attribution: {
    given: 0.9905,
    right: 0.9963,
  },
  controllersRight: 0.8717,
};
