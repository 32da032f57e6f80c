import { definePlant, type ParameterValues } from 'liftwright/plant';

/** √z, carried on as an odd function with a finite slope at zero: z / (z² + w²)^¼. */
function signedRoot(z: number, width: number): number {
  return z / (z * z + width * width) ** 0.25;
}

/**
 * Flow through the valve to the load, m³/s: opening times the root of the pressure left at the orifice. The sign of the
 * opening is rounded off over the valve's underlap.
 */
function loadFlow(spool: number, loadPressure: number, p: ParameterValues): number {
  const side = Math.tanh(spool / p.underlap);
  return p.flowGain * spool * signedRoot(p.supply - side * loadPressure, p.rootWidth);
}

export default definePlant({
  name: 'cylinder',
  description:
    'A servo valve and its hydraulic cylinder that move a table against a specimen, in a fatigue rig.',
  states: [
    { name: 'position', unit: 'm', min: -0.08, max: 0.08 },
    { name: 'velocity', unit: 'm/s', min: -0.6, max: 0.6 },
    { name: 'load-pressure', unit: 'Pa', min: -8e6, max: 8e6 },
    { name: 'spool', unit: '1', min: -1, max: 1 },
  ],
  inputs: [{ name: 'valve', unit: '1', min: -1, max: 1, rate: 100 }],
  outputs: [
    { name: 'position', unit: 'm', min: -0.08, max: 0.08, of: 'position' },
    { name: 'velocity', unit: 'm/s', min: -0.6, max: 0.6, of: 'velocity' },
    { name: 'load-pressure', unit: 'Pa', min: -8e6, max: 8e6, of: 'load-pressure' },
  ],
  parameters: {
    mass: { unit: 'kg', value: 400, tolerance: 0.05, meaning: 'table and piston' },
    damping: { unit: 'N s/m', value: 4000, tolerance: 0.3, meaning: 'viscous friction of seals and guides' },
    specimen: { unit: 'N/m', value: 4e4, tolerance: 0.2, meaning: 'stiffness of the specimen' },
    area: { unit: 'm^2', value: 1e-3, meaning: 'piston area' },
    oilStiffness: {
      unit: 'Pa/m^3',
      value: 2.8e12,
      tolerance: 0.3,
      meaning: 'four bulk moduli over the oil volume',
    },
    leakage: { unit: 'm^3/(s Pa)', value: 4e-12, tolerance: 0.5, meaning: 'leakage across the piston' },
    flowGain: {
      unit: 'm^3/(s sqrt(Pa))',
      value: 1.58e-7,
      tolerance: 0.05,
      meaning: 'flow of the open valve per root of pressure',
    },
    supply: { unit: 'Pa', value: 1e7, tolerance: 0.05, meaning: 'supply pressure' },
    lag: { unit: 's', value: 0.006, tolerance: 0.2, meaning: 'time constant of the spool' },
    underlap: { unit: '1', value: 0.05, meaning: 'opening over which the flow changes sides' },
    rootWidth: { unit: 'Pa', value: 2e5, meaning: 'pressure below which the orifice flow turns laminar' },
  },
  derivative(x, u, p) {
    const position = x[0];
    const velocity = x[1];
    const loadPressure = x[2];
    const spool = x[3];
    const flow = loadFlow(spool, loadPressure, p);
    return [
      velocity,
      (p.area * loadPressure - p.damping * velocity - p.specimen * position) / p.mass,
      p.oilStiffness * (flow - p.area * velocity - p.leakage * loadPressure),
      (u[0] - spool) / p.lag,
    ];
  },
  physics: [
    { name: 'load-flow', of: (x, p) => loadFlow(x[3], x[2], p) },
    { name: 'spool-times-pressure', of: (x) => x[3] * x[2] },
    { name: 'throttled-pressure', of: (x) => Math.abs(x[3]) * x[2] },
  ],
  operatingPoint: { x: [0, 0, 0, 0], u: [0] },
  hazards: [
    'Oil under 100 bar: a leak can inject oil through the skin, and a burst hose whips; depressurise before any work.',
    'The full supply moves the table with 10 kN: guard the crushing zone between table and specimen.',
    'When the specimen breaks, the stored energy accelerates the table: fit end cushions and a limit of the travel that shuts the supply off.',
    'A jammed or contaminated spool keeps the flow on whatever the command: fit an independent shut-off valve.',
  ],
});
