/** `H` is not positive definite, so that there may be no optimum, or no unique one. */
export class NotConvexError extends Error {
  /** The most negative (or the smallest) eigenvalue of H. */
  readonly eigenvalue: number;

  constructor(eigenvalue: number) {
    super(
      `H must be positive definite, got a smallest eigenvalue of ${eigenvalue}; ` +
        'give every input a weight on its move or its level',
    );
    this.name = 'NotConvexError';
    this.eigenvalue = eigenvalue;
  }
}
