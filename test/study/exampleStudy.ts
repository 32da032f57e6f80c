import type { Plant } from '../../src/plant/plant.ts';
import { bindStudy } from '../../src/study/bindStudy.ts';
import { formatProblem } from '../../src/study/problem.ts';
import { readStudy } from '../../src/study/readStudy.ts';
import type { Study } from '../../src/study/study.ts';

/** A valve of no particular make: enough channels that every key of the study file has something to name. */
export const valve: Plant = {
  name: 'valve',
  description: 'A spool on a spring, driven by a coil.',
  states: [
    { name: 'position', unit: 'm', min: -0.01, max: 0.01 },
    { name: 'velocity', unit: 'm/s', min: -1, max: 1 },
  ],
  inputs: [{ name: 'current', unit: 'A', min: -2, max: 2, rate: 400 }],
  outputs: [
    { name: 'position', unit: 'm', min: -0.01, max: 0.01, of: 'position' },
    { name: 'velocity', unit: 'm/s', min: -1, max: 1, of: 'velocity' },
  ],
  parameters: { mass: { unit: 'kg', value: 0.1 }, stiffness: { unit: 'N/m', value: 400 } },
  derivative: (x, u, { mass, stiffness }) => [x[1], (u[0] - stiffness * x[0] - 4 * x[1]) / mass],
  operatingPoint: { x: [0, 0], u: [0] },
  hazards: ['The spool pinches.'],
};

/** A study that uses every section. Line numbers matter to the tests. */
export const EXAMPLE = `title: A valve
plant: ./plant.ts
seed: 7
sampleTime: 2 ms
experiment:
  signals: [random-steps, chirp]
  trajectories: 50
  duration: 0.3 s
  hold: 10 ms
  highest: 50 Hz
lifting:
  parts:
    - { family: monomials, degree: 3 }
predictor:
  ridge: 1e-6
controller:
  horizon: 25
  blocks: [1, 2]
  inputs:
    current: { max: 1500 mA, rate: 300 A/s }
  outputs:
    velocity: { min: -0.5, max: 500 mm/s, limit: soft }
scenario:
  references:
    position: { shape: steps, values: [5 mm, -5 mm], hold: 0.5 s }
  start: { position: 1 mm }
  disturbances:
    current: { value: 0.1, from: 300 ms }
  noise: 0.3 %
accept:
  worstExcess: 5 %
`;

/** The example with one piece of text replaced; the piece must be there, and once. */
export function edit(from: string, to: string): string {
  if (EXAMPLE.split(from).length !== 2) throw new Error(`the example does not hold this once: ${from}`);
  return EXAMPLE.replace(from, () => to);
}

export function bind(text: string): { readonly study: Study | null; readonly lines: readonly string[] } {
  const origin = { file: '/somewhere/study.yaml', hash: 'hash', plant: '/somewhere/plant.ts' };
  const { study, problems } = bindStudy(readStudy(text, 'study.yaml'), valve, origin);
  return { study, lines: problems.map(formatProblem) };
}
