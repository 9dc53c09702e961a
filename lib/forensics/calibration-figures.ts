// In: nothing. Out: the shape of the calibration figures. The corpus and the run are in fixtures/calibration.

export interface CalibrationFigures {
  /** Seeds first .. first + count - 1 of the corpus. */
  readonly corpus: { readonly first: number; readonly count: number };
  readonly captures: number;
  readonly transactions: number;
  readonly contests: number;
  /** Of the claims stated between `from` and `to`: how many, their mean stated probability, the share that were real. */
  readonly reliability: readonly {
    readonly from: number;
    readonly to: number;
    readonly claims: number;
    readonly stated: number;
    readonly real: number;
  }[];
  /** Expected calibration error: mean distance between stated and real, weighted by claims. */
  readonly ece: number;
  readonly roc: readonly { readonly threshold: number; readonly found: number; readonly falsePer2000: number }[];
  /** Contests that an observer who knows the true signatures puts at 0.9 or more. */
  readonly visible: Visible;
  /** Those of them with two contenders. */
  readonly visiblePairs: Visible;
  /** In captures with drive taps, contests whose loser has one. */
  readonly tapped: { readonly contests: number; readonly found: number; readonly exactBit: number; readonly false: number };
  /** In the same captures, contests whose loser has none. */
  readonly untapped: { readonly contests: number; readonly found: number; readonly exactBit: number };
  readonly attribution: { readonly given: number; readonly right: number };
  /** Share of the captures in which the number of controllers was found right. */
  readonly controllersRight: number;
}

export interface Visible {
  readonly contests: number;
  readonly found: number;
  readonly exactBit: number;
  readonly bothParties: number;
}
