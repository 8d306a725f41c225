/** The newest readings of one channel with their times, for pictures. A ring: nothing is allocated after construction. */
export class History {
  private readonly values: Float64Array;
  private readonly times: Float64Array;
  private next = 0;
  private held = 0;

  constructor(readonly capacity: number) {
    this.values = new Float64Array(capacity);
    this.times = new Float64Array(capacity);
  }

  get length(): number {
    return this.held;
  }

  push(time: number, value: number): void {
    this.values[this.next] = value;
    this.times[this.next] = time;
    this.next = this.next + 1 === this.capacity ? 0 : this.next + 1;
    if (this.held < this.capacity) this.held++;
  }

  /** Copies the newest `min(length, capacity of the arrays)` readings, oldest first. @returns how many */
  copy(values: Float64Array, times: Float64Array): number {
    const n = Math.min(this.held, values.length);
    const from = (this.next - n + this.capacity) % this.capacity;
    const head = Math.min(n, this.capacity - from);
    values.set(this.values.subarray(from, from + head));
    times.set(this.times.subarray(from, from + head));
    values.set(this.values.subarray(0, n - head), head);
    times.set(this.times.subarray(0, n - head), head);
    return n;
  }
}
