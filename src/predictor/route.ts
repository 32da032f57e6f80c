import { conditionOf, type RegressionFactor } from './factor.ts';
import { factorByGram } from './gramRoute.ts';
import { factorByQr } from './orthogonalRoute.ts';
import type { PredictorSettings } from './predictor.ts';
import type { RegressionStream } from './regressors.ts';

/**
 * Largest condition number at which the normal equations are trusted. Their error is about ε κ² in the worst-placed
 * coefficient and ε κ in the fitted values: at 1e6 four digits of that coefficient and ten of every prediction are left,
 * and the eigenvalues of the Gram matrix (κ² = 1e12 against 1/ε = 4e15) still measure κ itself.
 */
export const GRAM_CONDITION_LIMIT = 1e6;

/**
 * Compresses the samples by the route asked for. `auto` takes the Gram route, which costs a fifth, measures the condition
 * number from its eigenvalues, and goes through the samples again by the orthogonal route where it exceeds the limit.
 */
export function factorRegression(
  stream: RegressionStream,
  route: PredictorSettings['route'],
): RegressionFactor {
  if (route === 'orthogonal') return factorByQr(stream);
  const gram = factorByGram(stream);
  const wellConditioned = gram.rank === gram.singular.length && conditionOf(gram) < GRAM_CONDITION_LIMIT;
  return route === 'gram' || wellConditioned ? gram : factorByQr(stream);
}
