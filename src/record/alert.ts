const LOSING = 'The memory for waiting alarms is used up: new ones are dropped and counted.';

/** What stands between the alarms and the disk, said once, and once more when it is over. */
export class Alert {
  /** What is wrong, in a sentence with what to do; null: nothing. */
  cause: string | null = null;
  private said: string | null = null;

  constructor(private readonly onTrouble: (sentence: string | null) => void) {}

  get stands(): boolean {
    return this.said !== null;
  }

  say(cause: string, isLosing: boolean): void {
    this.cause = cause;
    const sentence = isLosing ? `${cause} ${LOSING}` : cause;
    if (this.said === sentence) return;
    this.said = sentence;
    this.onTrouble(sentence);
  }

  withdraw(): void {
    this.cause = this.said = null;
    this.onTrouble(null);
  }

  /** The last word of a log that ends with records unwritten. */
  sayLost(count: number): void {
    const why = this.cause === null ? '' : ` ${this.cause.slice(0, this.cause.indexOf('. ') + 1)}`;
    this.onTrouble(`${count === 1 ? 'One record' : `${count} records`} could not be written to the alarm log before the end: lost.${why}`);
  }
}
