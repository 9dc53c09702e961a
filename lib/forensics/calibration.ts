// In: nothing. Out: the figures of the last calibration run, for the help page. Written by fixtures/calibration/run.ts; do not edit.

import type { CalibrationFigures } from "./calibration-figures";

export const CALIBRATION: CalibrationFigures = {
  corpus: {
    first: 31001,
    count: 300,
  },
  captures: 300,
  transactions: 59753,
  contests: 5245,
  reliability: [
    {
      from: 0.4,
      to: 0.5,
      claims: 59,
      stated: 0.4474,
      real: 0.9153,
    },
    {
      from: 0.5,
      to: 0.6,
      claims: 25,
      stated: 0.5506,
      real: 0.96,
    },
    {
      from: 0.6,
      to: 0.7,
      claims: 44,
      stated: 0.65,
      real: 0.8182,
    },
    {
      from: 0.7,
      to: 0.8,
      claims: 47,
      stated: 0.755,
      real: 0.9149,
    },
    {
      from: 0.8,
      to: 0.9,
      claims: 79,
      stated: 0.8541,
      real: 0.9114,
    },
    {
      from: 0.9,
      to: 0.95,
      claims: 72,
      stated: 0.9272,
      real: 0.9722,
    },
    {
      from: 0.95,
      to: 0.99,
      claims: 164,
      stated: 0.9767,
      real: 0.9573,
    },
    {
      from: 0.99,
      to: 1,
      claims: 2524,
      stated: 0.9987,
      real: 0.9984,
    },
  ],
  ece: 0.0214,
  roc: [
    {
      threshold: 0.4,
      found: 0.626,
      falsePer2000: 1.2442,
    },
    {
      threshold: 0.5,
      found: 0.6146,
      falsePer2000: 1.0435,
    },
    {
      threshold: 0.7,
      found: 0.602,
      falsePer2000: 0.6823,
    },
    {
      threshold: 0.9,
      found: 0.5778,
      falsePer2000: 0.2809,
    },
    {
      threshold: 0.95,
      found: 0.5631,
      falsePer2000: 0.2007,
    },
    {
      threshold: 0.99,
      found: 0.5301,
      falsePer2000: 0.0401,
    },
  ],
  visible: {
    contests: 2841,
    found: 0.9711,
    exactBit: 0.9855,
    bothParties: 0.9764,
  },
  visiblePairs: {
    contests: 2619,
    found: 0.9698,
    exactBit: 0.9854,
    bothParties: 0.9827,
  },
  tapped: {
    contests: 309,
    found: 1,
    exactBit: 1,
    false: 0,
  },
  untapped: {
    contests: 182,
    found: 0.8516,
    exactBit: 0.8297,
  },
  attribution: {
    given: 0.9919,
    right: 0.9965,
  },
  controllersRight: 0.8933,
};
