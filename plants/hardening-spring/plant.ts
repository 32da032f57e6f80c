import { definePlant } from 'liftwright/plant';

export default definePlant({
  name: 'hardening-spring',
  description: 'A shaker stage on flexures that stiffen with the stroke, moved by a voice coil.',
  states: [
    { name: 'position', unit: 'm', min: -0.015, max: 0.015 },
    { name: 'velocity', unit: 'm/s', min: -0.7, max: 0.7 },
  ],
  inputs: [{ name: 'force', unit: 'N', min: -15, max: 15, rate: 600 }],
  outputs: [
    { name: 'position', unit: 'm', min: -0.015, max: 0.015, of: 'position' },
    { name: 'velocity', unit: 'm/s', min: -0.7, max: 0.7, of: 'velocity' },
  ],
  parameters: {
    mass: { unit: 'kg', value: 0.5, tolerance: 0.05, meaning: 'stage and payload' },
    damping: { unit: 'N s/m', value: 5, tolerance: 0.2, meaning: 'viscous damping' },
    stiffness: { unit: 'N/m', value: 500, tolerance: 0.05, meaning: 'stiffness at the middle' },
    hardening: { unit: 'N/m^3', value: 5e6, tolerance: 0.1, meaning: 'cubic stiffness' },
  },
  derivative(x, u, { mass, damping, stiffness, hardening }) {
    const position = x[0];
    const velocity = x[1];
    const spring = stiffness * position + hardening * position ** 3;
    return [velocity, (u[0] - spring - damping * velocity) / mass];
  },
  physics: [{ name: 'cubic-force', of: (x, { hardening }) => hardening * x[0] ** 3 }],
  operatingPoint: { x: [0, 0], u: [0] },
  hazards: [
    'Near resonance a small force builds a large stroke, and two amplitudes can exist at one frequency: the stage may jump to the larger one.',
    'The flexures break by fatigue when the stroke is exceeded often; fit end stops and count the cycles.',
    'The coil heats with the square of the force; limit its effective current independently.',
  ],
});
