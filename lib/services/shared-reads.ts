interface Line<T> {
  running: Promise<T>;
  next: Promise<T> | null;
}

/**
 * One read at a time for a key. Whoever asks while one is under way gets the next, together with all others who did: a read
 * begins after everybody who gets it asked, so nobody is given what was so before, and any number of viewers cost two reads.
 */
export class SharedReads<T> {
  private readonly lines = new Map<string, Line<T>>();

  read(key: string, act: () => Promise<T>): Promise<T> {
    const line = this.lines.get(key);
    if (!line) return this.begin(key, act);
    line.next ??= line.running.then(
      () => this.begin(key, act),
      () => this.begin(key, act),
    );
    return line.next;
  }

  private begin(key: string, act: () => Promise<T>): Promise<T> {
    const line: Line<T> = { running: act(), next: null };
    this.lines.set(key, line);
    const end = () => {
      if (line.next === null && this.lines.get(key) === line) this.lines.delete(key);
    };
    line.running.then(end, end);
    return line.running;
  }
}
