// In: pieces of text. Out: standard output, as fast as the reader takes them. A reader that goes away is no error.

export class Output {
  private closed = false;

  constructor(private readonly stream: NodeJS.WriteStream) {
    stream.on("error", (error: NodeJS.ErrnoException) => {
      this.closed = true;
      if (error.code !== "EPIPE") throw error;
    });
  }

  async write(pieces: Iterable<string>): Promise<void> {
    for (const piece of pieces) {
      if (this.closed) return;
      if (this.stream.write(piece)) continue;
      await new Promise<void>((resolve) => {
        const go = () => {
          this.stream.off("drain", go);
          this.stream.off("error", go);
          this.stream.off("close", go);
          resolve();
        };
        this.stream.on("drain", go);
        this.stream.on("error", go);
        this.stream.on("close", go);
      });
    }
  }
}
