export type Severity = 'error' | 'warning' | 'note';

/** A finding that the user must read. */
export interface Caution {
  /** Short stable code, e.g. `short-trust`. */
  readonly code: string;
  readonly severity: Severity;
  readonly sentence: string;
  /** The number behind it, with its unit; null for the notes that always stand. */
  readonly value: number | null;
  readonly unit: string;
  readonly whatToDo: string;
}
