import { configureGlobal } from 'fast-check';

/** Laws are tried on the same draws in every run, so that a red run can be had again; FAST_CHECK_SEED tries others. */
configureGlobal({ seed: Number(process.env['FAST_CHECK_SEED'] ?? 20261) });
