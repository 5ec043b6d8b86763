import { SingleBar } from 'cli-progress';

export interface Progress {
  show(what: string, done: number): void;
  stop(): void;
}

/** A bar where the stream is a terminal, nothing elsewhere. */
export function progressOn(stream: NodeJS.WriteStream): Progress {
  if (!stream.isTTY) return { show: () => {}, stop: () => {} };
  const bar = new SingleBar({
    format: '{what} [{bar}] {percentage} %',
    stream,
    clearOnComplete: true,
    hideCursor: true,
  });
  bar.start(1, 0, { what: '' });
  return { show: (what, done) => bar.update(done, { what }), stop: () => bar.stop() };
}
