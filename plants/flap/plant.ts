import { definePlant } from 'liftwright/plant';

const resistance = 2;
const torqueConstant = 0.35;
const spring = 0.12;
const preload = 0.35;
const rest = 0.2;

export default definePlant({
  name: 'flap',
  description:
    'An air flap on a geared motor, drawn to its limp-home angle by a preloaded spring, with dry friction.',
  states: [
    { name: 'angle', unit: 'rad', min: 0, max: 1.5 },
    { name: 'speed', unit: 'rad/s', min: -15, max: 15 },
  ],
  inputs: [{ name: 'voltage', unit: 'V', min: -12, max: 12, rate: 1500 }],
  outputs: [
    { name: 'angle', unit: 'rad', min: 0, max: 1.5, of: 'angle' },
    { name: 'speed', unit: 'rad/s', min: -15, max: 15, of: 'speed' },
  ],
  parameters: {
    inertia: { unit: 'kg m^2', value: 0.003, tolerance: 0.05, meaning: 'flap, gear and rotor at the flap' },
    damping: { unit: 'N m s/rad', value: 0.02, tolerance: 0.2, meaning: 'viscous damping' },
    resistance: { unit: 'ohm', value: resistance, tolerance: 0.1, meaning: 'motor winding; grows with heat' },
    torqueConstant: {
      unit: 'N m/A',
      value: torqueConstant,
      tolerance: 0.05,
      meaning: 'torque at the flap per current',
    },
    spring: { unit: 'N m/rad', value: spring, tolerance: 0.1, meaning: 'spring stiffness' },
    preload: {
      unit: 'N m',
      value: preload,
      tolerance: 0.1,
      meaning: 'torque of the preloaded spring off its rest',
    },
    rest: { unit: 'rad', value: rest, tolerance: 0.05, meaning: 'limp-home angle' },
    friction: { unit: 'N m', value: 0.15, tolerance: 0.3, meaning: 'dry friction' },
    preloadWidth: { unit: 'rad', value: 0.02, meaning: 'angle over which the preload turns round' },
    frictionWidth: { unit: 'rad/s', value: 0.3, meaning: 'speed over which the friction turns round' },
  },
  derivative(x, u, p) {
    const angle = x[0];
    const speed = x[1];
    const off = angle - p.rest;
    const motor = (p.torqueConstant * (u[0] - p.torqueConstant * speed)) / p.resistance;
    const springs = p.spring * off + p.preload * Math.tanh(off / p.preloadWidth);
    const losses = p.damping * speed + p.friction * Math.tanh(speed / p.frictionWidth);
    return [speed, (motor - springs - losses) / p.inertia];
  },
  // The two torques that turn round, and the preload where the flap will be in 4, 8 and 12 ms at this speed: within the
  // next samples it crosses the rest angle at a time that depends on both.
  physics: [
    { name: 'preload', of: (x, p) => Math.tanh((x[0] - p.rest) / p.preloadWidth) },
    { name: 'friction', of: (x, p) => Math.tanh(x[1] / p.frictionWidth) },
    { name: 'preload-in-4-ms', of: (x, p) => Math.tanh((x[0] + 0.004 * x[1] - p.rest) / p.preloadWidth) },
    { name: 'preload-in-8-ms', of: (x, p) => Math.tanh((x[0] + 0.008 * x[1] - p.rest) / p.preloadWidth) },
    { name: 'preload-in-12-ms', of: (x, p) => Math.tanh((x[0] + 0.012 * x[1] - p.rest) / p.preloadWidth) },
    {
      name: 'preload-and-friction',
      of: (x, p) => Math.tanh((x[0] - p.rest) / p.preloadWidth) * Math.tanh(x[1] / p.frictionWidth),
    },
  ],
  // Held open at 0.8 rad: the motor balances spring and preload; tanh(30) is 1 to the last digit.
  operatingPoint: {
    x: [0.8, 0],
    u: [(resistance / torqueConstant) * (spring * (0.8 - rest) + preload)],
  },
  hazards: [
    'Without current the spring snaps the flap to its limp-home angle: keep fingers out of the duct, with the power off too.',
    'At full voltage the flap reaches its end stop within tenths of a second; the stop and the gear must take the impact.',
    'A flap that is stuck by ice or dirt draws the full current: supervise current and angle and switch off.',
  ],
});
