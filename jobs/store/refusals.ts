/** What the store declines to do: a closed set of codes; the message quotes what was asked and says what to do. */
export type StoreRefusalCode =
  | 'campaign-unknown'
  | 'name-taken'
  | 'name-invalid'
  | 'job-unknown'
  | 'job-not-failed'
  | 'scan-unknown'
  | 'scan-superseded'
  | 'sample-unknown'
  | 'instrument-unknown'
  | 'token-unknown'
  | 'token-invalid';

export class StoreRefusal extends Error {
  constructor(
    readonly code: StoreRefusalCode,
    message: string,
  ) {
    super(message);
    this.name = 'StoreRefusal';
  }
}
