/** Each verb lives in a file of its own, which is loaded when it is called and not before. */
export interface Verb {
  readonly name: string;
  readonly use: string;
  load(): Promise<{ run(args: readonly string[]): Promise<number> }>;
}

export const VERBS: readonly Verb[] = [
  { name: 'demo', use: 'the whole tool with nothing attached: a simulated stand whose sensors go wrong in turn', load: () => import('./demo.js') },
  { name: 'watch', use: 'the live screen of a stand', load: () => import('./watch.js') },
  { name: 'guard', use: 'the watch without a screen: alarms to the log, one status line a minute', load: () => import('./guard.js') },
  { name: 'check', use: 'what is wrong with a stand file, and what its watch costs', load: () => import('./check.js') },
  { name: 'replay', use: 'a recording through the same engine, as fast as it goes', load: () => import('./replay.js') },
  { name: 'odds', use: 'probabilities of the normal distribution, and the limits that hold a share', load: () => import('./odds.js') },
  { name: 'verify', use: 'whether the chain of an alarm log is whole', load: () => import('./verify.js') },
];
