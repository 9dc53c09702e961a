// In: nothing. Out: the figures of the last calibration run, for the help page. Written by fixtures/calibration/run.ts; do not edit.

import type { CalibrationFigures } from "./calibration-figures";

export const CALIBRATION: CalibrationFigures = {
  corpus: {
    first: 1001,
    count: 40,
  },
  captures: 40,
  transactions: 7612,
  contests: 672,
  reliability: [
    {
      from: 0.2,
      to: 0.3,
      claims: 13,
      stated: 0.2407,
      real: 0.6923,
    },
    {
      from: 0.3,
      to: 0.4,
      claims: 13,
      stated: 0.3526,
      real: 0.9231,
    },
    {
      from: 0.4,
      to: 0.5,
      claims: 6,
      stated: 0.4404,
      real: 1,
    },
    {
      from: 0.5,
      to: 0.6,
      claims: 7,
      stated: 0.5469,
      real: 0.7143,
    },
    {
      from: 0.6,
      to: 0.7,
      claims: 4,
      stated: 0.6366,
      real: 1,
    },
    {
      from: 0.7,
      to: 0.8,
      claims: 1,
      stated: 0.7743,
      real: 1,
    },
    {
      from: 0.8,
      to: 0.9,
      claims: 12,
      stated: 0.8681,
      real: 1,
    },
    {
      from: 0.9,
      to: 0.95,
      claims: 9,
      stated: 0.9209,
      real: 1,
    },
    {
      from: 0.95,
      to: 0.99,
      claims: 29,
      stated: 0.9745,
      real: 1,
    },
    {
      from: 0.99,
      to: 1,
      claims: 274,
      stated: 0.9987,
      real: 1,
    },
  ],
  ece: 0.0622,
  roc: [
    {
      threshold: 0.2,
      found: 0.5606,
      falsePer2000: 2.272,
    },
    {
      threshold: 0.3,
      found: 0.5466,
      falsePer2000: 0.9737,
    },
    {
      threshold: 0.5,
      found: 0.5186,
      falsePer2000: 0.6491,
    },
    {
      threshold: 0.7,
      found: 0.5047,
      falsePer2000: 0,
    },
    {
      threshold: 0.9,
      found: 0.4845,
      falsePer2000: 0,
    },
    {
      threshold: 0.95,
      found: 0.4705,
      falsePer2000: 0,
    },
    {
      threshold: 0.99,
      found: 0.4255,
      falsePer2000: 0,
    },
  ],
  visible: {
    contests: 313,
    found: 1,
    exactBit: 0.984,
    bothParties: 0.9553,
  },
  visiblePairs: {
    contests: 299,
    found: 1,
    exactBit: 0.99,
    bothParties: 0.9599,
  },
  tapped: {
    contests: 28,
    found: 0.8214,
    exactBit: 0.8214,
    false: 0,
  },
  attribution: {
    given: 0.9944,
    right: 0.9889,
  },
  controllersRight: 0.875,
};
