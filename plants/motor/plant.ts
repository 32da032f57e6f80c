import { definePlant } from 'liftwright/plant';

// S. Daniel-Berhe, H. Unbehauen, "Experimental physical parameter estimation of a thyristor driven DC-motor using the
// HMF-method", Control Eng. Practice 6:615–626, 1998; as used by M. Korda, I. Mezić, Automatica 93:149–160, 2018,
// section 8.2 (sample time 0.01 s, field current in [−4, 4], states scaled by 10 and 100).
const resistance = 12.345;
const coupling = 0.253;
const load = 1.47;
const voltage = 60;

export default definePlant({
  name: 'motor',
  description: 'A direct-current motor at constant armature voltage whose speed is set by its field current.',
  states: [
    { name: 'armature-current', unit: 'A', min: -10, max: 10 },
    { name: 'speed', unit: 'rad/s', min: -100, max: 100 },
  ],
  inputs: [{ name: 'field-current', unit: 'A', min: -4, max: 4 }],
  outputs: [{ name: 'speed', unit: 'rad/s', min: -100, max: 100, of: 'speed' }],
  parameters: {
    resistance: { unit: 'ohm', value: resistance, tolerance: 0.05, meaning: 'armature resistance' },
    inductance: { unit: 'H', value: 0.314, tolerance: 0.05, meaning: 'armature inductance' },
    coupling: {
      unit: 'N m/A^2',
      value: coupling,
      tolerance: 0.05,
      meaning: 'torque per armature and field current',
    },
    inertia: { unit: 'kg m^2', value: 0.00441, tolerance: 0.05, meaning: 'inertia of rotor and load' },
    friction: { unit: 'N m s/rad', value: 0.00732, tolerance: 0.2, meaning: 'viscous friction' },
    load: { unit: 'N m', value: load, tolerance: 0.1, meaning: 'constant load torque' },
    voltage: { unit: 'V', value: voltage, tolerance: 0.02, meaning: 'armature voltage' },
  },
  derivative(x, u, { resistance, inductance, coupling, inertia, friction, load, voltage }) {
    const current = x[0];
    const speed = x[1];
    const flux = coupling * u[0];
    return [
      (voltage - resistance * current - flux * speed) / inductance,
      (flux * current - friction * speed - load) / inertia,
    ];
  },
  // The motor at rest against its load: the current is U/R, the field makes exactly the load's torque.
  operatingPoint: { x: [voltage / resistance, 0], u: [(load * resistance) / (coupling * voltage)] },
  hazards: [
    'With a weak field the load drives the motor backwards without limit: supervise the field current and trip the armature supply when it is lost.',
    'Beyond the field current of greatest speed, more field means less speed: a controller with the wrong sign runs into the limit.',
    'Rotating shaft: guard it, and fit an overspeed trip that does not depend on the controller.',
  ],
});
