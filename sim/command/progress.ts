/**
 * A line of progress on standard error, when it is a terminal and a piece of work takes more than a second; wiped
 * before anything else is written.
 */
export class Progress {
  private readonly startedMs = Date.now();
  private shown = false;

  constructor(private readonly wanted: boolean) {}

  tell(what: string, share: number): void {
    if (!this.wanted || !process.stderr.isTTY || Date.now() - this.startedMs < 1000) return;
    process.stderr.write(`\r\x1b[K${what} ${(share * 100).toFixed(0)} %`);
    this.shown = true;
  }

  wipe(): void {
    if (this.shown) process.stderr.write('\r\x1b[K');
    this.shown = false;
  }
}
