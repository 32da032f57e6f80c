/** The few words of this report that are not common to the trade. */
export const GLOSSARY: readonly (readonly [word: string, meaning: string])[] = [
  ['lifting', 'the map from the state to more functions of it, in which the plant is nearly linear'],
  [
    'predictor',
    'the matrices A, B, C that lead the lifted state from sample to sample, and how they were fitted',
  ],
  ['plain linear', 'the same regression without any lifting: the rival that lifting has to beat'],
  ['linearised', 'the exact linearisation of the plant at its operating point'],
  ['persistence', 'the prediction that nothing changes'],
  ['re-lifted', 'the lifted predictor that computes the functions anew from each predicted state'],
  [
    'floor',
    'a direct regression of each step ahead: about the least error of any constant matrices with this lifting',
  ],
  ['held out', 'trajectories that neither the fit nor the choice of the ridge has seen'],
  ['half range', 'half of the distance between the ends of a channel’s range'],
  ['cost', 'weighted squares of tracking error, input moves and excess over limits, summed over the run'],
  ['caution', 'a finding that must be read, with the number behind it and what to do'],
];
