/** One line of a bench's result. */
export interface BenchRow {
  readonly name: string;
  readonly value: number;
  readonly unit: string;
  /** The aim in words, and whether this run reached it. */
  readonly goal?: string;
  readonly met?: boolean;
}
