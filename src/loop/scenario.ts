export interface ReferenceSettings {
  readonly output: string;
  readonly shape: 'constant' | 'steps' | 'sine' | 'ramp' | 'points';
  /** `constant`: one value; `steps`: values in turn; `sine`: centre and amplitude; `ramp`: from and to. */
  readonly values: readonly number[];
  /** Seconds: hold of each step, period of the sine, duration of the ramp. */
  readonly time: number;
  /** `points`: times of the values, joined by straight lines. */
  readonly times: readonly number[];
}

export interface ScenarioSettings {
  readonly duration: number;
  readonly start: Readonly<Record<string, number>>;
  readonly references: readonly ReferenceSettings[];
  /** Delay of the true input path, whole samples. */
  readonly delay: number;
  /** Standard deviation of the noise on each measured coordinate, share of its half range. */
  readonly noise: number;
  /** Constant disturbances on the inputs (unit of the input), switched on at `from`. */
  readonly disturbances: readonly { readonly input: string; readonly value: number; readonly from: number }[];
  /** Factors on nominal parameters of the true plant, by name. */
  readonly parameterFactors: Readonly<Record<string, number>>;
}
