/** Three growing columns and the way back from a row to its line in the file. */

/** Rows a file may have. */
export const ROW_LIMIT = 5_000_000;

export class ColumnsBuffer {
  rows = 0;
  time: Float64Array;
  temperature: Float64Array;
  heatFlow: Float64Array;
  /** From each of these rows on, line = row + offset. */
  private readonly shiftRows: number[] = [];
  private readonly shiftOffsets: number[] = [];

  constructor(capacity = 4096) {
    this.time = new Float64Array(capacity);
    this.temperature = new Float64Array(capacity);
    this.heatFlow = new Float64Array(capacity);
  }

  /** Doubles the room; the sum of old and new is at most three times the data for a moment, one column at a time. */
  grow(): void {
    const capacity = Math.min(this.time.length * 2, ROW_LIMIT + 1);
    this.time = enlarged(this.time, capacity);
    this.temperature = enlarged(this.temperature, capacity);
    this.heatFlow = enlarged(this.heatFlow, capacity);
  }

  /** Says that the next row stored will stand on `line`. */
  nextRowIsOn(line: number): void {
    const last = this.shiftRows.length - 1;
    if (last >= 0 && this.shiftRows[last] === this.rows) this.shiftOffsets[last] = line - this.rows;
    else {
      this.shiftRows.push(this.rows);
      this.shiftOffsets.push(line - this.rows);
    }
  }

  /** Line (from 1) of a stored row (from 0). */
  lineOf(row: number): number {
    let low = 0;
    let high = this.shiftRows.length - 1;
    while (low < high) {
      const middle = (low + high + 1) >> 1;
      if (this.shiftRows[middle] <= row) low = middle;
      else high = middle - 1;
    }
    return row + this.shiftOffsets[low];
  }
}

function enlarged(column: Float64Array, capacity: number): Float64Array {
  const larger = new Float64Array(capacity);
  larger.set(column);
  return larger;
}
