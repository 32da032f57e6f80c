/** One scalar signal: its name, its unit, and the range in which the plant is meant to work. */
export interface Channel {
  readonly name: string;
  /** SI unit symbol, e.g. `m`, `m/s`, `A`; `1` for a pure number. */
  readonly unit: string;
  /** Working range in `unit`; `min < max`. Data are drawn from it and scaled by it. */
  readonly min: number;
  readonly max: number;
}

/** An input: the range is the actuator's hard limit, `rate` the fastest change in `unit`/s, if there is one. */
export interface InputChannel extends Channel {
  readonly rate?: number;
}

/** A parameter of the physics and how well it is known. */
export interface Parameter {
  readonly unit: string;
  readonly value: number;
  /** Relative tolerance, 0.05 for ±5 %; 0 when exact. */
  readonly tolerance?: number;
  readonly meaning?: string;
}

/** Named parameter values, as the plant's functions receive them. */
export type ParameterValues = Readonly<Record<string, number>>;

/** An output: a state by name, or a function of the state. */
export interface OutputChannel extends Channel {
  readonly of: string | ((x: ArrayLike<number>, p: ParameterValues) => number);
}

/** A function of the state that the physics suggests as a lifting coordinate (in SI units). */
export interface PhysicsFunction {
  readonly name: string;
  readonly of: (x: ArrayLike<number>, p: ParameterValues) => number;
}

/**
 * A nonlinear actuator: `ẋ = f(x, u, p)`, `y = h(x)`, the input held over each sample (zero-order hold).
 * All quantities in SI units.
 */
export interface Plant {
  readonly name: string;
  /** One sentence on what it is. */
  readonly description: string;
  readonly states: readonly Channel[];
  readonly inputs: readonly InputChannel[];
  readonly outputs: readonly OutputChannel[];
  readonly parameters: Readonly<Record<string, Parameter>>;
  /** `f`: `x` (nx), `u` (nu) → `ẋ` (nx), a new array. Must not change its arguments. */
  readonly derivative: (x: ArrayLike<number>, u: ArrayLike<number>, p: ParameterValues) => ArrayLike<number>;
  /** Functions that the physics offers as lifting coordinates. */
  readonly physics?: readonly PhysicsFunction[];
  /** The point about which a linear controller would be designed: state (nx) and input (nu). */
  readonly operatingPoint: { readonly x: readonly number[]; readonly u: readonly number[] };
  /** What can hurt people or the machine, one sentence each; shown in every report. */
  readonly hazards: readonly string[];
}

/** Helps the editor check a plant as it is typed; returns its argument. */
export function definePlant(plant: Plant): Plant {
  return plant;
}

/** The nominal parameter values of a plant. */
export function nominalParameters(plant: Plant): ParameterValues {
  return Object.fromEntries(Object.entries(plant.parameters).map(([name, p]) => [name, p.value]));
}

/** The outputs `y = h(x)` of a plant, `ny` numbers. */
export function readOutputs(plant: Plant, x: ArrayLike<number>, p: ParameterValues): number[] {
  return plant.outputs.map((output) => {
    if (typeof output.of === 'function') return output.of(x, p);
    return x[plant.states.findIndex((state) => state.name === output.of)];
  });
}
