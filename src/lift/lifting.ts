import type { Random } from '../numerics/random.ts';
import type { Channel } from '../plant/plant.ts';

/** A constant of a lifting part as it is written to JSON. */
export type PartConstant = number | string | boolean | readonly PartConstant[];

/** One named part of a lifting as plain data: everything needed to evaluate it again, on any machine. */
export interface LiftingPart {
  /** Name of the family, a key of the family table. */
  readonly family: string;
  /** Names of the functions that are kept, in order; a report shows them. */
  readonly names: readonly string[];
  /** Which of the family's functions are kept, ascending; duplicates of earlier parts are left out. */
  readonly keep: readonly number[];
  /** The family's constants (degrees, centres, frequencies, …), in scaled coordinates. */
  readonly constants: Readonly<Record<string, PartConstant>>;
}

/**
 * A function left out because another one has the same values on the data, up to scale and offset; one that does not
 * vary on the data is the same as the constant, `1`.
 */
export interface DroppedFunction {
  readonly name: string;
  readonly sameAs: string;
}

/**
 * The lifting `psi: x → z` in scaled coordinates. The first `nx` entries of `z` are the state itself, so that a
 * selection reads it out exactly.
 */
export interface Lifting {
  readonly nx: number;
  readonly nz: number;
  /** One name for each entry of `z`. */
  readonly names: readonly string[];
  readonly parts: readonly LiftingPart[];
  readonly dropped: readonly DroppedFunction[];
  /** Index in `z` of the constant function, −1 if there is none. */
  readonly constantIndex: number;
}

/** A function of the physical coordinates. */
export interface PhysicsTerm {
  readonly name: string;
  /** Value in physical units at a physical state. */
  readonly of: (x: ArrayLike<number>) => number;
}

/** An output that is a function of the state: it becomes a lifting function, so that a selection reads it out too. */
export interface OutputTerm extends PhysicsTerm {
  /** Its declared range, by which its value is scaled. */
  readonly min: number;
  readonly max: number;
}

/** What a family needs to turn its settings into a part. */
export interface LiftingContext {
  readonly coordinates: readonly Channel[];
  /** Scaled samples from which centres are drawn, M × nx, row-major. */
  readonly samples: Float64Array;
  readonly nx: number;
  /** Physical from scaled: `x = centre + half · scaled`, nx each. */
  readonly centre: readonly number[];
  readonly half: readonly number[];
  readonly physics: readonly PhysicsTerm[];
  /** Outputs that are functions of the state; empty where all are coordinates. */
  readonly outputs: readonly OutputTerm[];
  readonly random: Random;
}

/** What evaluating a part may need besides its constants: the maps to physical units and the plant's functions. */
export type EvaluationContext = Pick<LiftingContext, 'nx' | 'centre' | 'half' | 'physics' | 'outputs'>;

/** One setting of a family, from which the study file's table, its defaults and its documentation are made. */
export interface FamilySetting {
  readonly key: string;
  readonly kind: 'integer' | 'number' | 'choice';
  readonly min?: number;
  readonly max?: number;
  readonly choices?: readonly string[];
  readonly default: number | string;
  readonly meaning: string;
}

/** The values of a family's settings in one study. */
export type FamilyValues = Readonly<Record<string, number | string>>;

/** All functions of a family, evaluated at once. */
export interface FamilyFunctions {
  readonly count: number;
  /** `out[offset + i] = psi_i(x)`, `x` scaled, nx entries. */
  readonly evaluateInto: (out: Float64Array, offset: number, x: ArrayLike<number>) => void;
  /** `out[(offset + i) · nx + j] = ∂psi_i/∂x_j`. */
  readonly gradientInto: (out: Float64Array, offset: number, x: ArrayLike<number>) => void;
}

/** A family of lifting functions. A new one is one file that exports this record, and one line in `families.ts`. */
export interface LiftingFamily {
  readonly name: string;
  readonly meaning: string;
  readonly source?: string;
  readonly settings: readonly FamilySetting[];
  /** The constants and all function names for these settings. */
  readonly build: (
    values: FamilyValues,
    context: LiftingContext,
  ) => { readonly names: readonly string[]; readonly constants: LiftingPart['constants'] };
  readonly functions: (constants: LiftingPart['constants'], context: EvaluationContext) => FamilyFunctions;
}

/** A lifting ready to be evaluated. */
export interface BoundLifting {
  readonly nx: number;
  readonly nz: number;
  /** `z = psi(x)`: `x` scaled (nx), `z` (nz) overwritten. */
  readonly liftInto: (z: Float64Array, x: ArrayLike<number>) => void;
  /** `J = ∂psi/∂x` (nz × nx, row-major), overwritten. */
  readonly jacobianInto: (J: Float64Array, x: ArrayLike<number>) => void;
}

export interface LiftingPartSettings {
  readonly family: string;
  readonly values: Readonly<Record<string, number | string>>;
}

export interface LiftingSettings {
  readonly parts: readonly LiftingPartSettings[];
  /** Is the constant function included? */
  readonly constant: boolean;
}
