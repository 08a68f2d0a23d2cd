/** Something has to be computed, and the ledger was opened for reading: open it for writing and ask again. */
export class OutOfDate extends Error {
  override readonly name = "OutOfDate";
  constructor(what: string) {
    super(`Cannot bring ${what} up to date: the ledger was opened for reading`);
  }
}
