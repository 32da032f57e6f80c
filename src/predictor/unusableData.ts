/** The user's data or lifting cannot be regressed or assessed; the sentence says what is wrong and what to do. */
export class UnusableDataError extends Error {
  constructor(sentence: string) {
    super(sentence);
    this.name = 'UnusableDataError';
  }
}
