import { definePlant } from 'liftwright/plant';

export default definePlant({
  name: 'snap-through',
  description:
    'A bistable stage on a buckled spring with two wells, pushed from one to the other by a force actuator.',
  states: [
    { name: 'position', unit: 'm', min: -0.015, max: 0.015 },
    { name: 'velocity', unit: 'm/s', min: -0.3, max: 0.3 },
  ],
  inputs: [{ name: 'force', unit: 'N', min: -2, max: 2, rate: 80 }],
  outputs: [
    { name: 'position', unit: 'm', min: -0.015, max: 0.015, of: 'position' },
    { name: 'velocity', unit: 'm/s', min: -0.3, max: 0.3, of: 'velocity' },
  ],
  parameters: {
    mass: { unit: 'kg', value: 0.25, tolerance: 0.05, meaning: 'moving mass' },
    damping: { unit: 'N s/m', value: 2, tolerance: 0.2, meaning: 'viscous damping' },
    softening: { unit: 'N/m', value: 200, tolerance: 0.05, meaning: 'negative stiffness at the middle' },
    hardening: { unit: 'N/m^3', value: 2e6, tolerance: 0.05, meaning: 'cubic stiffness' },
  },
  derivative(x, u, { mass, damping, softening, hardening }) {
    const position = x[0];
    const velocity = x[1];
    const spring = softening * position - hardening * position ** 3;
    return [velocity, (u[0] + spring - damping * velocity) / mass];
  },
  physics: [{ name: 'cubic-force', of: (x, { hardening }) => hardening * x[0] ** 3 }],
  operatingPoint: { x: [0.01, 0], u: [0] },
  hazards: [
    'Once past the middle the stage accelerates by itself: fingers and tools must stay out of its stroke, with the power off too.',
    'The spring holds energy in both wells; secure the stage mechanically before working on it.',
    'A late or missing command near the middle lets the stage snap through to the end stop; fit stops that take the full impact.',
  ],
});
