// In: nothing. Out: every fault rule by its kind; a kind without a rule does not compile.

import type { FaultKind } from "./report";
import type { Rule } from "./rule";
import { addressCollision } from "./rules/address-collision";
import { addressNack } from "./rules/address-nack";
import { betweenThresholds } from "./rules/between-thresholds";
import { bitSlip } from "./rules/bit-slip";
import { busClear } from "./rules/bus-clear";
import { dataNack } from "./rules/data-nack";
import { lookAlike } from "./rules/look-alike";
import { lowSwing } from "./rules/low-swing";
import { misplacedStart } from "./rules/misplaced-start";
import { misplacedStop } from "./rules/misplaced-stop";
import { missingStop } from "./rules/missing-stop";
import { pecMismatch } from "./rules/pec-mismatch";
import { phantomStart } from "./rules/phantom-start";
import { reservedAddress } from "./rules/reserved-address";
import { runtAfterStretch } from "./rules/runt-after-stretch";
import { sclStuckLow } from "./rules/scl-stuck-low";
import { sdaChangeWhileHigh } from "./rules/sda-change-while-high";
import { sdaStuckLow } from "./rules/sda-stuck-low";
import { shortByte } from "./rules/short-byte";
import { slowRise } from "./rules/slow-rise";
import { smbusTimeout } from "./rules/smbus-timeout";
import { spike } from "./rules/spike";
import { suspectedCollision } from "./rules/suspected-collision";
import { voidMessage } from "./rules/void-message";

export const RULES: Readonly<Record<FaultKind, Rule>> = {
  "address-collision": addressCollision,
  "address-nack": addressNack,
  "between-thresholds": betweenThresholds,
  "bit-slip": bitSlip,
  "bus-clear": busClear,
  "data-nack": dataNack,
  "look-alike": lookAlike,
  "low-swing": lowSwing,
  "misplaced-start": misplacedStart,
  "misplaced-stop": misplacedStop,
  "missing-stop": missingStop,
  "pec-mismatch": pecMismatch,
  "phantom-start": phantomStart,
  "reserved-address": reservedAddress,
  "runt-after-stretch": runtAfterStretch,
  "scl-stuck-low": sclStuckLow,
  "sda-change-while-high": sdaChangeWhileHigh,
  "sda-stuck-low": sdaStuckLow,
  "short-byte": shortByte,
  "slow-rise": slowRise,
  "smbus-timeout": smbusTimeout,
  spike: spike,
  "suspected-collision": suspectedCollision,
  "void-message": voidMessage,
};
