/** What the lifting reads: the whole state, or delayed outputs and inputs when the state is not measured. */
export interface CoordinateSettings {
  readonly read: 'state' | 'delays';
  /** For `delays`: y_k … y_{k − outputLags} and u_{k−1} … u_{k − inputLags}. */
  readonly outputLags: number;
  readonly inputLags: number;
}
