// Properties run from one seed, so that a build that failed can be repeated, and one that passed is not luck of the day.
// PROPERTY_SEED=random lets every run draw its own, which is how new counterexamples are looked for.

import fc from "fast-check";

const asked = process.env.PROPERTY_SEED;
if (asked !== "random") fc.configureGlobal({ seed: Number(asked ?? 20_261_201) });
