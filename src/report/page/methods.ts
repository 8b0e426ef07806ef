/** Published methods that stand behind the figures, by verb. */
const integration = [
  'Integration: Rodas5P, G. Steinebach, BIT Numerical Mathematics 63, 27 (2023); Rosenbrock methods as in E. Hairer and G. Wanner, Solving Ordinary Differential Equations II (1996), Sec. IV.7.',
];
const rest = [
  'Steady state: pseudo-transient continuation, C. T. Kelley and D. E. Keyes, SIAM J. Numer. Anal. 35, 508 (1998).',
];
const diagram = [
  'Operating diagrams: W. L. McCabe and E. W. Thiele, Ind. Eng. Chem. 17, 605 (1925), in the form used for extraction.',
];
const ordered = ['Modes: W. E. Arnoldi, Q. Appl. Math. 9, 17 (1951), on the exact linearisation.'];

export const methods: Readonly<Record<string, readonly string[]>> = {
  run: [...integration, ...diagram],
  steady: [...rest, ...diagram],
  commission: [...integration, ...rest, ...ordered],
  rehearse: [
    ...integration,
    ...rest,
    'Edges of starts and sizes: regula falsi in its Illinois variant, M. Dowell and P. Jarratt, BIT 11, 168 (1971).',
  ],
  tune: [
    ...integration,
    'Settings: SIMC, S. Skogestad, J. Process Control 13, 291 (2003); AMIGO, K. J. Åström and T. Hägglund, J. Process Control 14, 635 (2004); J. G. Ziegler and N. B. Nichols, Trans. ASME 64, 759 (1942); G. H. Cohen and G. A. Coon, Trans. ASME 75, 827 (1953).',
    'Step tests by two points: C. L. Smith (1972); K. R. Sundaresan and P. R. Krishnaswamy, Can. J. Chem. Eng. 56, 257 (1978).',
  ],
};
