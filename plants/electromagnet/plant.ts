import { definePlant } from 'liftwright/plant';

export default definePlant({
  name: 'electromagnet',
  description:
    'An armature held in mid-air between a return spring and the pull of an electromagnet, positioned by its gap.',
  states: [
    { name: 'gap', unit: 'm', min: 0.0018, max: 0.0054 },
    { name: 'velocity', unit: 'm/s', min: -0.15, max: 0.15 },
    { name: 'current', unit: 'A', min: 0, max: 1.6 },
  ],
  inputs: [{ name: 'command', unit: 'A', min: 0, max: 1.6, rate: 200 }],
  outputs: [
    { name: 'gap', unit: 'm', min: 0.0018, max: 0.0054, of: 'gap' },
    { name: 'velocity', unit: 'm/s', min: -0.15, max: 0.15, of: 'velocity' },
  ],
  parameters: {
    mass: { unit: 'kg', value: 0.3, tolerance: 0.02, meaning: 'armature and what it carries' },
    damping: { unit: 'N s/m', value: 1.5, tolerance: 0.3, meaning: 'viscous damping' },
    stiffness: { unit: 'N/m', value: 600, tolerance: 0.05, meaning: 'return spring' },
    free: { unit: 'm', value: 0.006, tolerance: 0.02, meaning: 'gap at which the spring is relaxed' },
    magnet: {
      unit: 'N m^2/A^2',
      value: 2e-5,
      tolerance: 0.05,
      meaning: 'pull times gap squared per current squared',
    },
    iron: { unit: 'm', value: 0.0003, tolerance: 0.1, meaning: 'air gap that the iron path is worth' },
    lag: { unit: 's', value: 0.002, tolerance: 0.2, meaning: 'time constant of the current amplifier' },
  },
  derivative(x, u, { mass, damping, stiffness, free, magnet, iron, lag }) {
    const gap = x[0];
    const velocity = x[1];
    const current = x[2];
    const pull = magnet * (current / (gap + iron)) ** 2;
    return [velocity, (stiffness * (free - gap) - pull - damping * velocity) / mass, (u[0] - current) / lag];
  },
  physics: [
    { name: 'pull', of: (x, { magnet, iron }) => magnet * (x[2] / (x[0] + iron)) ** 2 },
    { name: 'flux', of: (x, { iron }) => x[2] / (x[0] + iron) },
    { name: 'pull-change', of: (x, { magnet, iron }) => (magnet * x[2] ** 2 * x[1]) / (x[0] + iron) ** 3 },
  ],
  // At a gap of 3 mm the spring pulls with 600 · 0.003 = 1.8 N, and 0.0033 · √(1.8 / 2e-5) = 0.99 A balances it.
  operatingPoint: { x: [0.003, 0, 0.99], u: [0.99] },
  hazards: [
    'Below two thirds of the free gap no constant current holds the armature: when control is lost it slams onto the pole or flies back to its stop.',
    'The magnet can only pull; a controller that expects it to push will not brake the armature in time.',
    'Switching the coil off releases its stored energy as a voltage peak: fit a freewheeling path rated for it.',
    'The coil stays hot after use, and its field may disturb pacemakers and magnetic media nearby.',
  ],
});
