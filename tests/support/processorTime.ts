/** Seconds of processor time that a piece of work takes: unlike the clock, not lengthened by what else the machine does. */
export function processorSeconds(work: () => unknown): number {
  const start = process.cpuUsage();
  work();
  const { user, system } = process.cpuUsage(start);
  return (user + system) / 1e6;
}
