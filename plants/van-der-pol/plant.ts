import { definePlant } from 'liftwright/plant';

// M. Korda, I. Mezić, "Linear predictors for nonlinear dynamical systems: Koopman operator meets model predictive
// control", Automatica 93:149–160, 2018, section 8.1: x1' = 2 x2, x2' = −0.8 x1 + 2 x2 − 10 x1² x2 + u,
// sample time 0.01 s, u in [−1, 1], initial states in [−1, 1]².
export default definePlant({
  name: 'van-der-pol',
  description: 'The forced oscillator of van der Pol: unstable at rest, with a limit cycle around it.',
  states: [
    { name: 'x1', unit: '1', min: -1, max: 1 },
    { name: 'x2', unit: '1', min: -1, max: 1 },
  ],
  inputs: [{ name: 'u', unit: '1', min: -1, max: 1 }],
  outputs: [
    { name: 'x1', unit: '1', min: -1, max: 1, of: 'x1' },
    { name: 'x2', unit: '1', min: -1, max: 1, of: 'x2' },
  ],
  parameters: {
    pace: { unit: '1/s', value: 2, meaning: 'x1 per x2' },
    stiffness: { unit: '1/s', value: 0.8, tolerance: 0.05, meaning: 'restoring term' },
    growth: { unit: '1/s', value: 2, tolerance: 0.05, meaning: 'negative damping at rest' },
    saturation: {
      unit: '1/s',
      value: 10,
      tolerance: 0.05,
      meaning: 'damping that grows with the square of x1',
    },
    gain: { unit: '1/s', value: 1, meaning: 'effect of the input' },
  },
  derivative(x, u, { pace, stiffness, growth, saturation, gain }) {
    const x1 = x[0];
    const x2 = x[1];
    return [pace * x2, -stiffness * x1 + growth * x2 - saturation * x1 ** 2 * x2 + gain * u[0]];
  },
  physics: [{ name: 'nonlinear-damping', of: (x) => x[0] ** 2 * x[1] }],
  operatingPoint: { x: [0, 0], u: [0] },
  hazards: [
    'An academic oscillator without a machine; where it stands for one, expect it to swing up from rest without any input.',
  ],
});
