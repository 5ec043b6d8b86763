import { render } from 'preact';
import { App } from './app.tsx';
import { Bench } from './bench.ts';

const bench = new Bench();
render(<App bench={bench} />, document.getElementById('page')!);
void bench.restore();
