/**
 * Where a number becomes a caution, each with the reason. A caution is raised when the number is beyond its threshold; the
 * threshold itself is still in order. Three more belong to the stages that measure them: `HELPS_BELOW` (does lifting help),
 * `SUBSTEP_TOLERANCE` (integration error) and the study's own tolerance (trust).
 */
export const THRESHOLDS = {
  /**
   * Condition of the matrix of the input's last values. Independent values have about 1, values held over five samples
   * about 10; at 1000 one direction of past inputs is a thousand times weaker than the strongest, below sensor noise.
   */
  lagCondition: 1e3,
  /** Share of ten cells of a coordinate's range with data: with fewer than six, half of the range is a guess. */
  coordinateCells: 0.6,
  /** Width of input values in the data over the input's range: below half, the controller extrapolates when it needs force. */
  inputShare: 0.5,
  /** Two input values show no curvature in the input; three are the least that do (closed form). */
  inputLevels: 3,
  /** Samples for each regressor: ten give the usual margin against fitting noise (common practice, no source). */
  samplesPerRegressor: 10,
  /** Held-out starts: a 95 % quantile of 60 rests on the three largest of them (closed form). */
  heldOutStarts: 60,
  /** Share of trajectories cut short: above a fifth, the data near the edge of the ranges thin out. */
  cutShare: 0.2,
  /** Share of the closed-loop path outside the data: five times the 1 % by which the region misses its own data. */
  outsideData: 0.05,
  /** Error over the least that any constant matrices reach with this lifting: within a tenth nothing is left to refit. */
  ratioToFloor: 1.1,
  /** `radius^N`: tenfold growth turns an error of 1 % into one of 10 % within the horizon. */
  growth: 10,
  /** Decimal digits lost in the regression: with more than 8 of 15.9, single precision would keep none. */
  digitsLost: 8,
  /** With more than 13 lost, fewer than 3 are left: an error. */
  digitsLostError: 13,
  /** Condition of H: above 1e6 single precision (1.2e-7) solves to no better than a tenth. */
  hessianCondition: 1e6,
  /** Above 1e12 double precision (2.2e-16) keeps fewer than 4 digits: an error. */
  hessianConditionError: 1e12,
  /**
   * `|s| Ts` of the fastest mode that matters: 0.2 to 0.6 is the usual choice (K. J. Åström, B. Wittenmark,
   * Computer-Controlled Systems, 3rd ed., 1997; from memory).
   */
  fastestModeLong: 0.6,
  /** A tenth of the lower end of that range: consecutive samples then differ by less than 2 %. */
  fastestModeShort: 0.02,
  /** Integration error that is no longer small beside a sensor of 0.1 %: an error. */
  integrationError: 1e-3,
  /** Excess over a soft limit, share of the range, above which softness is no excuse (common practice, no source). */
  softExcess: 0.05,
  /** Share of solves that are not optimal above which it is an error: one in twenty is no longer an exception. */
  notOptimal: 0.05,
  /**
   * Reversals of the input a sample. White noise reverses at 2 of 3 samples (I. J. Bienaymé's turning points, 1874; closed
   * form 2/3); at 1 of 5 the input follows noise rather than the reference.
   */
  reversalsPerSample: 0.2,
  /** Share of steps with an input at its limit: above half, the limits and not the weights shape the motion. */
  atLimit: 0.5,
  /** Remaining offset over the half range: half of the settling band of 2 %. */
  offset: 0.01,
  /** Cost of a simpler controller over the lifted one's: within 5 % it is as good, as `HELPS_BELOW` has it for predictions. */
  rivalCost: 1.05,
} as const;
