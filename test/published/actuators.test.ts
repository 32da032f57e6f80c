import { describe, expect, it } from 'vitest';
import cylinder from '../../plants/cylinder/plant.ts';
import electromagnet from '../../plants/electromagnet/plant.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { checkPlant } from '../../src/plant/check.ts';
import { integrateSample } from '../../src/plant/integrate.ts';
import { definePlant, nominalParameters, type Plant } from '../../src/plant/plant.ts';
import { chooseSubsteps } from '../../src/plant/substeps.ts';
import { eigenvaluesAt } from '../plants/linearise.ts';

const hazards = ['A model from a paper, without a machine.'];
const channel = (name: string, unit: string, min: number, max: number) => ({ name, unit, min, max });

function expectReal(actual: { re: number; im: number }[], expected: readonly number[], digits = 1e-7): void {
  expect(actual.length).toBe(expected.length);
  for (const [i, { re, im }] of actual.entries()) {
    expect(Math.abs(re / expected[i] - 1)).toBeLessThan(digits);
    expect(im).toBe(0);
  }
}

/** The state after `time` seconds of constant input, in samples whose sub-steps `chooseSubsteps` chose. */
function settle(plant: Plant, x: readonly number[], u: readonly number[], sampleTime: number, time: number) {
  const p = nominalParameters(plant);
  const { count } = chooseSubsteps(plant, sampleTime, createRandom(1));
  const state = Float64Array.from(x);
  for (let k = 0; k < Math.round(time / sampleTime); k++) {
    expect(integrateSample(plant, p, state, u, sampleTime, count, state)).toBe('finished');
  }
  return state;
}

describe('an electronic throttle with published constants', () => {
  // R. Loh, T. Thanom, J. Pyko, A. Lee, Engineering 5:587–600, 2013 [quoted]; eigenvalues of the linear part recomputed.
  const throttle = definePlant({
    name: 'throttle',
    description: 'Electronic throttle, linear part.',
    states: [
      channel('angle', 'rad', -1, 1),
      channel('speed', 'rad/s', -20, 20),
      channel('current', 'A', -8, 8),
    ],
    inputs: [channel('voltage', 'V', -12, 12)],
    outputs: [{ ...channel('angle', 'rad', -1, 1), of: 'angle' }],
    parameters: {
      J: { unit: 'kg m^2', value: 0.0021 },
      B: { unit: 'N m s/rad', value: 0.0088 },
      K: { unit: 'N m/A', value: 0.383 },
      R: { unit: 'ohm', value: 1.5 },
      L: { unit: 'H', value: 0.0015 },
      Ks: { unit: 'N m/rad', value: 0.087 },
    },
    derivative: (x, u, { J, B, K, R, L, Ks }) => [
      x[1],
      (K * x[2] - B * x[1] - Ks * x[0]) / J,
      (u[0] - R * x[2] - K * x[1]) / L,
    ],
    operatingPoint: { x: [0, 0, 0], u: [0] },
    hazards,
  });

  it('has the recomputed eigenvalues', () => {
    expect(checkPlant(throttle).problems).toEqual([]);
    expectReal(
      eigenvaluesAt(throttle, [0, 0, 0], [0], [1, 20, 8]),
      [-0.82910286, -52.55313253, -950.8082408],
      1e-8,
    );
  });

  it('settles at angle K V / (R Ks), closed form, through sub-steps fit for its fastest mode', () => {
    const end = settle(throttle, [0, 0, 0], [0.3], 0.005, 40);
    expect(Math.abs(end[0] / ((0.383 * 0.3) / (1.5 * 0.087)) - 1)).toBeLessThan(1e-9);
  });
});

describe('the cylinder plant under published constants of an electro-hydraulic servo', () => {
  // A. Alleyne, J. Hedrick, IEEE Trans. Control Syst. Technol. 3:94–101, 1995 [quoted]: P' = −βP − αA v + γ xv √(Ps − sgn(xv) P),
  // xv' = (u − xv)/τ; stall force and no-load speed recomputed.
  const alpha = 4.515e13;
  const gamma = 1.545e9;
  const supply = 10342500;
  const p = {
    ...nominalParameters(cylinder),
    area: 3.35e-4,
    oilStiffness: alpha,
    leakage: 1 / alpha,
    flowGain: gamma / alpha,
    supply,
    lag: 1 / 30,
    // The paper has neither underlap nor laminar flow: both widths far below its spool travel and pressures.
    underlap: 1e-9,
    rootWidth: 1e-3,
  };

  it('moves at the recomputed no-load speed: there the pressure does not change', () => {
    const speed = 0.0328502506;
    const [, , pressureRate, spoolRate] = Array.from(cylinder.derivative([0, speed, 0, 1e-4], [1e-4], p));
    expect(Math.abs(pressureRate) / (alpha * 3.35e-4 * speed)).toBeLessThan(1e-9);
    expect(spoolRate).toBe(0);
  });

  it('stalls at the recomputed force A Ps: there no flow is left but the leakage', () => {
    expect(Math.abs(3.35e-4 * supply - 3464.7375)).toBeLessThan(1e-9);
    const [, , pressureRate] = Array.from(cylinder.derivative([0, 0, supply, 1e-4], [1e-4], p));
    expect(Math.abs(pressureRate + supply)).toBeLessThan(1e-5 * supply);
  });

  it('moves the same way in both directions, relation', () => {
    const ahead = Array.from(cylinder.derivative([0.01, 0.02, 3e6, 1e-4], [2e-4], p));
    const back = Array.from(cylinder.derivative([-0.01, -0.02, -3e6, -1e-4], [-2e-4], p));
    expect(back).toEqual(ahead.map((value) => -value));
  });
});

describe('magnetic levitation with published constants', () => {
  // H. Khalil, Nonlinear Systems, 3rd edition, exercises [read]; current and eigenvalues at y = 0.05 recomputed.
  const m = 0.1;
  const g = 9.81;
  const levitation = definePlant({
    name: 'levitation',
    description: 'A ball below an electromagnet.',
    states: [channel('y', 'm', 0, 0.1), channel('speed', 'm/s', -1, 1), channel('current', 'A', 0, 12)],
    inputs: [channel('voltage', 'V', 0, 15)],
    outputs: [{ ...channel('y', 'm', 0, 0.1), of: 'y' }],
    parameters: {
      m: { unit: 'kg', value: m },
      k: { unit: 'N s/m', value: 0.001 },
      g: { unit: 'm/s^2', value: g },
      a: { unit: 'm', value: 0.05 },
      L0: { unit: 'H', value: 0.01 },
      L1: { unit: 'H', value: 0.02 },
      R: { unit: 'ohm', value: 1 },
    },
    derivative(x, u, { m, k, g, a, L0, L1, R }) {
      const [y, speed, i] = Array.from(x);
      const L = L1 + (L0 * a) / (a + y);
      return [
        speed,
        g - (k / m) * speed - (L0 * a * i ** 2) / (2 * m * (a + y) ** 2),
        (-R * i + (L0 * a * speed * i) / (a + y) ** 2 + u[0]) / L,
      ];
    },
    operatingPoint: { x: [0.05, 0, 6.26418390534633], u: [6.26418390534633] },
    hazards,
  });
  const { x, u } = levitation.operatingPoint;

  it('rests at the recomputed current and has the recomputed eigenvalues, one of them unstable', () => {
    const rates = Array.from(levitation.derivative(x, u, nominalParameters(levitation)));
    for (const rate of rates) expect(Math.abs(rate)).toBeLessThan(1e-12 * g);
    expectReal(eigenvaluesAt(levitation, x, u, [0.05, 1, 6]), [13.64128409, -14.8130377, -38.83824642]);
  });

  it('the electromagnet plant pulls with the weight of that ball at the recomputed current', () => {
    const pull = electromagnet.physics!.find(({ name }) => name === 'pull')!;
    const p = { ...nominalParameters(electromagnet), magnet: (0.01 * 0.05) / 2, iron: 0.05 };
    expect(Math.abs(pull.of([0.05, 0, 6.26418390534633], p) / (m * g) - 1)).toBeLessThan(1e-13);
  });
});

describe('a stirred-tank reactor with published constants', () => {
  // M. Henson, D. Seborg, Nonlinear Process Control, 1997 [read]; its three steady states at Tc = 300 K recomputed.
  const reactor = definePlant({
    name: 'reactor',
    description: 'A cooled stirred tank with one exothermic reaction; minutes.',
    states: [channel('concentration', 'mol/l', 0, 1), channel('temperature', 'K', 300, 400)],
    inputs: [channel('coolant', 'K', 280, 320)],
    outputs: [{ ...channel('temperature', 'K', 300, 400), of: 'temperature' }],
    parameters: {},
    derivative(x, u) {
      const [c, T] = Array.from(x);
      const rate = 7.2e10 * Math.exp(-8750 / T) * c;
      const heat = 1000 * 0.239;
      return [1 - c - rate, 350 - T + (5e4 / heat) * rate + (5e4 / (100 * heat)) * (u[0] - T)];
    },
    operatingPoint: { x: [0.5, 350], u: [300] },
    hazards,
  });
  // Closed form: between two crossings of the heat curve that are not saddles lies one that is (the slopes alternate).
  const STEADY = [
    { x: [0.87725295, 324.47544343], saddle: false },
    { x: [0.49991829, 350.00552869], saddle: true },
    { x: [0.20876138, 369.70491342], saddle: false },
  ];

  it.each(STEADY)('is at rest at the recomputed state $x; a saddle: $saddle', ({ x, saddle }) => {
    const rates = Array.from(reactor.derivative(x, [300], {}));
    expect(Math.abs(rates[0])).toBeLessThan(1e-7);
    expect(Math.abs(rates[1])).toBeLessThan(1e-5);
    const [first, second] = eigenvaluesAt(reactor, x, [300], [1, 100]);
    expect(first.re * second.re < 0).toBe(saddle);
  });

  it('comes to rest at the recomputed cold state from near by', () => {
    const [{ x }] = STEADY;
    const end = settle(reactor, [x[0] + 0.02, x[1] - 1], [300], 0.05, 40);
    expect(Math.abs(end[0] - x[0])).toBeLessThan(1e-7);
    expect(Math.abs(end[1] - x[1])).toBeLessThan(1e-5);
  });
});
