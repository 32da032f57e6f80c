/** The numbers leave nothing to go on with: exit code 3. The sentence says what happened and what to do. */
export class NumericalStop extends Error {
  constructor(sentence: string) {
    super(sentence);
    this.name = 'NumericalStop';
  }
}
