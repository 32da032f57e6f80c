/** Functions of one lifting, at most: beyond it the regression takes minutes and no controller can use the result. */
export const MOST_FUNCTIONS = 2000;
