declare module 'quadprog' {
  const quadprog: {
    solveQP: (
      D: number[][],
      d: number[],
      A: number[][],
      b: number[],
      meq: number,
    ) => { solution: number[]; message: string };
  };
  export default quadprog;
}
