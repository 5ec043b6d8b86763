declare module '*?raw' {
  const text: string;
  export default text;
}
declare module '*?worker&inline' {
  const WorkerOfFile: new () => Worker;
  export default WorkerOfFile;
}
