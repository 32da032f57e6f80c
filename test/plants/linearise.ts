import { decomposeGeneral } from '../../src/numerics/eigen.ts';
import { zeros } from '../../src/numerics/matrix.ts';
import { nominalParameters, type ParameterValues, type Plant } from '../../src/plant/plant.ts';

/** `∂f/∂x` at a point by central differences, steps of ε^{1/3} times `size` (nx). */
export function jacobianAt(
  plant: Plant,
  x: readonly number[],
  u: readonly number[],
  size: readonly number[],
  p: ParameterValues = nominalParameters(plant),
) {
  const nx = x.length;
  const J = zeros(nx, nx);
  for (let j = 0; j < nx; j++) {
    const h = Math.cbrt(Number.EPSILON) * size[j];
    const at = (sign: number) =>
      plant.derivative(
        x.map((value, i) => (i === j ? value + sign * h : value)),
        u,
        p,
      );
    const [ahead, behind] = [at(1), at(-1)];
    for (let i = 0; i < nx; i++) J.data[i * nx + j] = (ahead[i] - behind[i]) / (2 * h);
  }
  return J;
}

/** Real parts of the eigenvalues at a point, descending; NaN for each that is complex when `real` is asked for. */
export function eigenvaluesAt(...args: Parameters<typeof jacobianAt>): { re: number; im: number }[] {
  const { real, imaginary } = decomposeGeneral(jacobianAt(...args));
  return Array.from(real, (re, i) => ({ re, im: imaginary[i] })).sort((a, b) => b.re - a.re || b.im - a.im);
}
