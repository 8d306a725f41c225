/** Each verb lives in a file of its own, which is loaded when it is called and not before. */
export interface Verb {
  readonly name: string;
  readonly use: string;
  load(): Promise<{ run(args: readonly string[]): Promise<number> }>;
}

export const VERBS: readonly Verb[] = [
  { name: 'odds', use: 'probabilities of the normal distribution, and the limits that hold a share', load: () => import('./odds.js') },
];
