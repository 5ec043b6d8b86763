import { Worker } from 'node:worker_threads';

/** A worker ended before it answered: out of memory, killed, or a defect. */
export class WorkerLost extends Error {
  override readonly name = 'WorkerLost';
}

interface Waiting<Task, Answer> {
  readonly task: Task;
  readonly resolve: (answer: Answer) => void;
  readonly reject: (error: WorkerLost) => void;
}

/** Threads that answer one task each at a time, in any order. A thread that is lost is replaced; its task is refused with `WorkerLost`. */
export class WorkerPool<Task, Answer> {
  private readonly script: URL;
  private readonly data: unknown;
  private readonly size: number;
  private readonly idle: Worker[] = [];
  private readonly busy = new Map<Worker, Waiting<Task, Answer>>();
  private readonly queue: Waiting<Task, Answer>[] = [];
  private closed = false;

  constructor(script: URL, size: number, data: unknown) {
    this.script = script;
    this.size = size;
    this.data = data;
  }

  run(task: Task): Promise<Answer> {
    return new Promise((resolve, reject) => {
      this.queue.push({ task, resolve, reject });
      this.dispatch();
    });
  }

  async close(): Promise<void> {
    this.closed = true;
    await Promise.all([...this.idle, ...this.busy.keys()].map((worker) => worker.terminate()));
  }

  private dispatch(): void {
    while (this.queue.length > 0) {
      const worker = this.idle.pop() ?? (this.busy.size < this.size ? this.hire() : null);
      if (!worker) return;
      const waiting = this.queue.shift()!;
      this.busy.set(worker, waiting);
      worker.postMessage(waiting.task);
    }
  }

  private hire(): Worker {
    // A small young generation: pieces come and go, and memory that is not collected counts as used.
    const worker = new Worker(this.script, { workerData: this.data, resourceLimits: { maxYoungGenerationSizeMb: 8 } });
    worker.on('message', (answer: Answer) => {
      const waiting = this.busy.get(worker)!;
      this.busy.delete(worker);
      this.idle.push(worker);
      waiting.resolve(answer);
      this.dispatch();
    });
    let reason = 'it stopped';
    worker.on('error', (error) => (reason = error instanceof Error ? error.message : String(error)));
    worker.on('exit', () => {
      const waiting = this.busy.get(worker);
      this.busy.delete(worker);
      const at = this.idle.indexOf(worker);
      if (at >= 0) this.idle.splice(at, 1);
      if (this.closed) return;
      waiting?.reject(new WorkerLost(reason));
      this.dispatch();
    });
    return worker;
  }
}
