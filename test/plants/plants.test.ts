import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import cylinder from '../../plants/cylinder/plant.ts';
import electromagnet from '../../plants/electromagnet/plant.ts';
import flap from '../../plants/flap/plant.ts';
import hardeningSpring from '../../plants/hardening-spring/plant.ts';
import motor from '../../plants/motor/plant.ts';
import snapThrough from '../../plants/snap-through/plant.ts';
import vanDerPol from '../../plants/van-der-pol/plant.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { checkPlant } from '../../src/plant/check.ts';
import { integrateSample } from '../../src/plant/integrate.ts';
import { nominalParameters, type Plant, readOutputs } from '../../src/plant/plant.ts';
import { chooseSubsteps, SUBSTEP_TOLERANCE } from '../../src/plant/substeps.ts';
import { eigenvaluesAt } from './linearise.ts';

/** The sample time that each README suggests, seconds. */
const PLANTS: readonly (readonly [Plant, number])[] = [
  [vanDerPol, 0.01],
  [motor, 0.01],
  [electromagnet, 0.002],
  [flap, 0.005],
  [cylinder, 0.005],
  [snapThrough, 0.005],
  [hardeningSpring, 0.005],
];

const halfRanges = (plant: Plant) => plant.states.map(({ min, max }) => (max - min) / 2);
const derivative = (plant: Plant, x: readonly number[], u: readonly number[]) =>
  Array.from(plant.derivative(x, u, nominalParameters(plant)));
const eigenvalues = (plant: Plant, x: readonly number[], u: readonly number[]) =>
  eigenvaluesAt(plant, x, u, halfRanges(plant));
const values = (plant: Plant) => nominalParameters(plant);

/** States at the samples 0 … steps under `input(k, x)`. */
function run(
  plant: Plant,
  start: readonly number[],
  sampleTime: number,
  steps: number,
  input: (k: number, x: Float64Array) => readonly number[],
) {
  const { count } = chooseSubsteps(plant, sampleTime, createRandom(1));
  const path = [Float64Array.from(start)];
  for (let k = 0; k < steps; k++) {
    const next = new Float64Array(start.length);
    const outcome = integrateSample(
      plant,
      values(plant),
      path[k],
      input(k, path[k]),
      sampleTime,
      count,
      next,
    );
    expect(outcome).toBe('finished');
    path.push(next);
  }
  return path;
}

/** Relative closeness that fails on NaN. */
function expectNear(actual: number, expected: number, relative: number): void {
  expect(Math.abs(actual - expected)).toBeLessThanOrEqual(relative * Math.abs(expected));
}

describe.each(PLANTS.map(([plant, sampleTime]) => ({ name: plant.name, plant, sampleTime })))(
  'the plant $name',
  ({ plant, sampleTime }) => {
    const folder = `plants/${plant.name}`;

    it('passes the check that every user’s plant must pass', () => {
      expect(checkPlant(plant).problems).toEqual([]);
    });

    it('rests at its operating point, defining equation ẋ = 0', () => {
      const { x, u } = plant.operatingPoint;
      const half = halfRanges(plant);
      const aside = half.map((_, j) =>
        derivative(
          plant,
          x.map((value, i) => (i === j ? value + half[i] : value)),
          u,
        ),
      );
      for (const [i, rate] of derivative(plant, x, u).entries()) {
        // Relative to what half a range of deviation of one state does to that rate.
        const scale = Math.max(...aside.map((rates) => Math.abs(rates[i])));
        expect(Math.abs(rate)).toBeLessThanOrEqual(1e-12 * scale);
      }
    });

    it('is integrated to the promised accuracy at the sample time of its README', () => {
      const { count, error } = chooseSubsteps(plant, sampleTime, createRandom(5));
      expect(error).toBeLessThanOrEqual(SUBSTEP_TOLERANCE);
      expect(count).toBeLessThanOrEqual(64);
    });

    it('reads its operating point within the output ranges', () => {
      for (const [i, y] of readOutputs(plant, plant.operatingPoint.x, values(plant)).entries()) {
        expect(y >= plant.outputs[i].min && y <= plant.outputs[i].max).toBe(true);
      }
    });

    it('has a README with equations, every symbol of its parameters, sample time and hazards', () => {
      const text = readFileSync(`${folder}/README.md`, 'utf8');
      for (const name of Object.keys(plant.parameters)) expect(text).toContain(`\`${name}\``);
      for (const { name } of [...plant.states, ...plant.inputs]) expect(text).toContain(`\`${name}\``);
      expect(text).toContain(`${sampleTime * 1000} ms`);
      expect(text).toMatch(/## Hazards/);
      for (const hazard of plant.hazards) expect(text.replace(/\s+/g, ' ')).toContain(hazard);
    });
  },
);

it('every folder of plants holds a plant of the folder’s name, and all are tested here', () => {
  const folders = readdirSync('plants').filter((name) => existsSync(`plants/${name}/plant.ts`));
  expect(folders.sort()).toEqual(PLANTS.map(([plant]) => plant.name).sort());
});

describe('van der Pol', () => {
  // M. Korda, I. Mezić, Automatica 93:149–160, 2018 [ODE from memory]: x1' = 2 x2, x2' = −0.8 x1 + 2 x2 − 10 x1² x2 + u.
  it('has the published right side', () => {
    for (const [x1, x2, u] of [
      [0.3, -0.7, 0.5],
      [-1, 1, -1],
    ]) {
      const [d1, d2] = derivative(vanDerPol, [x1, x2], [u]);
      expectNear(d1, 2 * x2, 1e-15);
      expectNear(d2, -0.8 * x1 + 2 * x2 - 10 * x1 ** 2 * x2 + u, 1e-14);
    }
  });

  it('leaves the origin with the eigenvalues 1 ± j √0.6, closed form', () => {
    const [a, b] = eigenvalues(vanDerPol, [0, 0], [0]);
    for (const { re } of [a, b]) expectNear(re, 1, 1e-8);
    expectNear(a.im, Math.sqrt(0.6), 1e-8);
    expectNear(b.im, -Math.sqrt(0.6), 1e-8);
  });
});

describe('motor', () => {
  // Same paper, section 8.2, constants of S. Daniel-Berhe, H. Unbehauen, Control Eng. Practice 6:615–626, 1998 [read];
  // equilibria and eigenvalues recomputed.
  it.each([
    { u: 1, x: [5.25417427, -19.22047956], re: [-2.93029326, -38.04485731] },
    { u: 2, x: [3.41517095, 35.25635289], re: [-7.46511522, -33.51003535] },
  ])('rests at the recomputed state with the recomputed eigenvalues for u = $u', ({ u, x, re }) => {
    for (const rate of derivative(motor, x, [u])) expect(Math.abs(rate)).toBeLessThan(1e-5);
    for (const [i, { re: real, im }] of eigenvalues(motor, x, [u]).entries()) {
      expectNear(real, re[i], 1e-8);
      expect(im).toBe(0);
    }
  });

  // Recomputed: from (5, 0), u = 2, exact x(0.5) = (3.45892143, 34.39163634); RK4 with h = 0.01: (3.45892147, 34.39163545).
  it('reaches the recomputed state after half a second, exactly and by RK4 with h = 0.01', () => {
    const exact = run(motor, [5, 0], 0.01, 50, () => [2]).at(-1)!;
    expect(Math.abs(exact[0] - 3.45892143)).toBeLessThan(1e-8);
    expect(Math.abs(exact[1] - 34.39163634)).toBeLessThan(1e-7);
    const coarse = Float64Array.from([5, 0]);
    for (let k = 0; k < 50; k++) integrateSample(motor, values(motor), coarse, [2], 0.01, 1, coarse);
    expect(Math.abs(coarse[0] - 3.45892147)).toBeLessThan(1e-8);
    expect(Math.abs(coarse[1] - 34.39163545)).toBeLessThan(1e-8);
  });

  it('has at zero field the eigenvalues −R/L and −B/J, closed form', () => {
    const [slow, fast] = eigenvalues(motor, [0, 0], [0]);
    expectNear(slow.re, -0.00732 / 0.00441, 1e-8);
    expectNear(fast.re, -12.345 / 0.314, 1e-8);
  });
});

describe('snap-through', () => {
  const { mass, damping, softening, hardening } = values(snapThrough);
  const well = Math.sqrt(softening / hardening);
  const energy = ([x, v]: Float64Array) =>
    (mass * v ** 2) / 2 - (softening * x ** 2) / 2 + (hardening * x ** 4) / 4;

  it('has wells at ±√(softening / hardening) = ±10 mm, closed form', () => {
    expectNear(well, 0.01, 1e-15);
    for (const x of [-well, well]) {
      expect(Math.abs(derivative(snapThrough, [x, 0], [0])[1])).toBeLessThan(1e-12);
      for (const { re, im } of eigenvalues(snapThrough, [x, 0], [0])) {
        expectNear(re, -damping / (2 * mass), 1e-7);
        expectNear(Math.abs(im), Math.sqrt((2 * softening) / mass - (damping / (2 * mass)) ** 2), 1e-7);
      }
    }
  });

  it('is a saddle in the middle, closed form', () => {
    const d = damping / (2 * mass);
    const root = Math.sqrt(d ** 2 + softening / mass);
    const [up, down] = eigenvalues(snapThrough, [0, 0], [0]);
    expectNear(up.re, -d + root, 1e-7);
    expectNear(down.re, -d - root, 1e-7);
  });

  it('never gains energy without force, defining equation', () => {
    const path = run(snapThrough, [0.014, 0.2], 0.005, 400, () => [0]);
    for (let k = 1; k < path.length; k++) {
      // Beside rounding and the integration error, relative to the depth of a well.
      expect(energy(path[k])).toBeLessThanOrEqual(energy(path[k - 1]) + (1e-6 * softening * well ** 2) / 4);
    }
    expectNear(Math.abs(path.at(-1)![0]), well, 1e-3);
  });

  // Closed form: the spring's largest force between the wells is 2 softening well / (3 √3).
  it('has an actuator stronger than the barrier, whose static push crosses it and whose weaker one does not', () => {
    const barrier = (2 * softening * well) / (3 * Math.sqrt(3));
    expect(snapThrough.inputs[0].max).toBeGreaterThan(2 * barrier);
    const [weak, strong] = [0.9, 1.1].map((factor) => {
      // Raised slowly, so that the stage has no swing to help it over.
      const path = run(snapThrough, [-well, 0], 0.005, 2000, (k) => [
        barrier * factor * Math.min(1, k / 1000),
      ]);
      return path.at(-1)![0];
    });
    expect(weak).toBeLessThan(0);
    expect(strong).toBeGreaterThan(0);
  });

  it('crosses within 30 samples of 5 ms at full force under its rate limit, faster than 0.12 m/s', () => {
    const [{ max, rate = Number.POSITIVE_INFINITY }] = snapThrough.inputs;
    const path = run(snapThrough, [-well, 0], 0.005, 30, (k) => [Math.min(max, rate * 0.005 * (k + 1))]);
    expect(path.some(([x]) => x >= well)).toBe(true);
    expect(Math.max(...path.map(([, v]) => v))).toBeGreaterThan(0.12);
  });
});

describe('hardening spring', () => {
  const { mass, damping, stiffness, hardening } = values(hardeningSpring);

  it('needs the force k x + k₃ x³ to rest at x, closed form', () => {
    for (const x of [-0.012, 0.004, 0.01]) {
      const force = stiffness * x + hardening * x ** 3;
      expect(Math.abs(derivative(hardeningSpring, [x, 0], [force])[1])).toBeLessThan(1e-12);
      expect(eigenvalues(hardeningSpring, [x, 0], [force]).every(({ re }) => re < 0)).toBe(true);
    }
  });

  it('rings at rest with √(k/m − (c/2m)²), closed form', () => {
    const [{ re, im }] = eigenvalues(hardeningSpring, [0, 0], [0]);
    expectNear(re, -damping / (2 * mass), 1e-7);
    expectNear(im, Math.sqrt(stiffness / mass - (damping / (2 * mass)) ** 2), 1e-7);
  });

  // A. Nayfeh, D. Mook, Nonlinear Oscillations, 1979 [from memory]: undamped, the exact period of Duffing's equation is
  // 4 ∫ dx / v over a quarter swing; here by the arithmetic–geometric mean.
  it('swings undamped with the period of Duffing’s equation, closed form by elliptic integral', () => {
    const amplitude = 0.012;
    const a = stiffness / mass;
    const b = hardening / mass;
    const modulus = (b * amplitude ** 2) / (2 * (a + b * amplitude ** 2));
    let [p, q] = [1, Math.sqrt(1 - modulus)];
    for (let i = 0; i < 8; i++) [p, q] = [(p + q) / 2, Math.sqrt(p * q)];
    const period = (4 * Math.PI) / (2 * p) / Math.sqrt(a + b * amplitude ** 2);
    const free = { ...values(hardeningSpring), damping: 0 };
    const x = Float64Array.from([amplitude, 0]);
    expect(integrateSample(hardeningSpring, free, x, [0], period, 4000, x)).toBe('finished');
    expectNear(x[0], amplitude, 1e-9);
    expect(Math.abs(x[1])).toBeLessThan(1e-6);
  });
});

describe('electromagnet', () => {
  const p = values(electromagnet);
  /** The current that balances the spring at a gap. */
  const balance = (gap: number) => (gap + p.iron) * Math.sqrt((p.stiffness * (p.free - gap)) / p.magnet);

  it('is unstable at its operating point', () => {
    const { x, u } = electromagnet.operatingPoint;
    expectNear(x[2], balance(x[0]), 1e-14);
    const [{ re }] = eigenvalues(electromagnet, [...x], [...u]);
    expect(re).toBeGreaterThan(10);
  });

  // Closed form: the pull's stiffness 2 F / (gap + iron) equals the spring's where gap + iron = ⅔ (free + iron).
  it('pulls in below two thirds of the free gap, closed form', () => {
    const edge = (2 / 3) * (p.free + p.iron) - p.iron;
    for (const [gap, stable] of [
      [edge * 1.02, true],
      [edge * 0.98, false],
    ] as const) {
      const i = balance(gap);
      expect(eigenvalues(electromagnet, [gap, 0, i], [i]).every(({ re }) => re < 0)).toBe(stable);
    }
  });

  it('can be held at every gap of its range with current to spare', () => {
    for (let gap = 0.0018; gap <= 0.0054; gap += 0.0002) {
      expect(balance(gap)).toBeLessThan(0.8 * electromagnet.inputs[0].max);
    }
  });

  it('falls to its pole or to its spring when disturbed at the operating point, current held', () => {
    for (const side of [-1, 1]) {
      const path = run(electromagnet, [0.003 + side * 1e-4, 0, 0.99], 0.002, 36, () => [0.99]);
      expect(path.some(([gap]) => side * (gap - 0.003) > 0.0005)).toBe(true);
    }
  });
});

describe('flap', () => {
  const p = values(flap);

  it('is drawn to its limp-home angle without voltage, from both sides, as far as friction allows', () => {
    for (const start of [0.02, 1.2]) {
      const end = run(flap, [start, 0], 0.005, 600, () => [0]).at(-1)!;
      expect(Math.abs(end[0] - p.rest)).toBeLessThan(p.preloadWidth);
    }
  });

  it('turns with preload and friction of full size off their breakpoints, closed form', () => {
    const [, rate] = derivative(flap, [1, 2], [0]);
    const torque =
      p.spring * 0.8 + p.preload + p.damping * 2 + p.friction + (p.torqueConstant ** 2 * 2) / p.resistance;
    expectNear(rate, -torque / p.inertia, 1e-5);
  });

  it('offers functions that turn round where preload and friction do', () => {
    const value = (name: string, x: number[]) => flap.physics!.find((f) => f.name === name)!.of(x, p);
    expect(value('preload', [p.rest, 3])).toBe(0);
    expect(value('friction', [1, 0])).toBe(0);
    expectNear(value('preload-in-8-ms', [0.3, 5]), value('preload', [0.34, 5]), 1e-12);
    expect(value('preload', [p.rest + 5 * p.preloadWidth, 0])).toBeGreaterThan(0.999);
  });

  it('opens from limp-home to 0.8 rad within a quarter of a second at full voltage', () => {
    const path = run(flap, [p.rest, 0], 0.005, 50, (k) => [Math.min(12, 7.5 * (k + 1))]);
    expect(path.some(([angle]) => angle > 0.8)).toBe(true);
  });
});

describe('cylinder', () => {
  const p = values(cylinder);

  it('moves at flowGain √supply / area without load when the valve is open, closed form', () => {
    const speed = (p.flowGain * Math.sqrt(p.supply)) / p.area;
    const [, , pressureRate] = derivative(cylinder, [0, speed, 0, 1], [1]);
    // The laminar width takes (1 + w²)^-1/4, w = 0.02, off the root: 1e-4.
    expect(Math.abs(pressureRate)).toBeLessThan(1.1e-4 * p.oilStiffness * p.area * speed);
  });

  it('takes no flow from the supply when the load pressure has reached it, and gives it back beyond', () => {
    const flow = (pressure: number) =>
      derivative(cylinder, [0, 0, pressure, 1], [1])[2] / p.oilStiffness + p.leakage * pressure;
    const open = flow(0);
    expect(Math.abs(flow(p.supply))).toBeLessThan(1e-12 * open);
    expect(flow(1.1 * p.supply)).toBeLessThan(0);
    expectNear(flow(0.75 * p.supply) / open, 0.5, 2e-3);
  });

  it('rings with its oil spring, √((4β/V) A²/m) = 83.7 rad/s and the specimen, closed form of the linear part', () => {
    const omega = Math.sqrt((p.oilStiffness * p.area ** 2 + p.specimen) / p.mass);
    const ringing = eigenvalues(cylinder, [0, 0, 0, 0], [0]).filter(({ im }) => im > 0);
    expect(ringing.length).toBe(1);
    // Damping turns the pair about the origin and leaves its modulus within 3 %.
    expectNear(Math.hypot(ringing[0].re, ringing[0].im), omega, 0.03);
    expect(ringing[0].re).toBeLessThan(0);
  });

  // Closed form: A p = k x and A v = −C p − ṗ / (4β/V) leave ẋ = −(C k / A²) / (1 + k / ((4β/V) A²)) x.
  it('creeps back from a loaded specimen through the leakage alone when the valve is shut, closed form', () => {
    const { area, specimen, leakage, oilStiffness } = p;
    const pace = (leakage * specimen) / area ** 2 / (1 + specimen / (oilStiffness * area ** 2));
    const start = 0.04;
    const end = run(cylinder, [start, 0, (specimen * start) / area, 0], 0.005, 800, () => [0]).at(-1)!;
    // Viscous friction adds C b / A² = 0.016 to the 1 of that balance.
    expectNear(end[0] / start, Math.exp(-pace * 4), 0.02);
  });
});
