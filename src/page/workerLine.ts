// The bundler makes the worker's class; the file itself exports nothing.
// oxlint-disable-next-line import/default
import EngineWorker from './worker.ts?worker&inline';
import type { Asked, RequestName, Requests, Told } from './protocol.ts';

interface Waiting {
  readonly resolve: (answer: never) => void;
  readonly reject: (reason: Error) => void;
  readonly progress: (done: number) => void;
}

/** Thrown at whoever waits when the person cancels. */
export class Cancelled extends Error {
  override readonly name = 'Cancelled';
}

/** A line to one worker: ask by name, hear progress, hang up. */
export class WorkerLine {
  private readonly worker = new EngineWorker();
  private readonly waiting = new Map<number, Waiting>();
  private lastId = 0;

  constructor() {
    this.worker.addEventListener('message', ({ data }: MessageEvent<Told>) => {
      const one = this.waiting.get(data.id);
      if (!one) return;
      if ('done' in data) {
        one.progress(data.done);
        return;
      }
      this.waiting.delete(data.id);
      if ('defect' in data) one.reject(new Error(data.defect));
      else one.resolve(data.answer as never);
    });
  }

  ask<Name extends RequestName>(
    name: Name,
    body: Requests[Name]['in'],
    progress: (done: number) => void = () => {},
  ): Promise<Requests[Name]['out']> {
    const id = ++this.lastId;
    return new Promise((resolve, reject) => {
      this.waiting.set(id, { resolve, reject, progress });
      // A worker has no origin to name, unlike a window.
      // oxlint-disable-next-line unicorn/require-post-message-target-origin
      this.worker.postMessage({ id, name, body } satisfies Asked);
    });
  }

  /** Ends the worker at once, whatever it is doing. */
  hangUp(): void {
    this.worker.terminate();
    for (const { reject } of this.waiting.values()) reject(new Cancelled());
    this.waiting.clear();
  }
}
