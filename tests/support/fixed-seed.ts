import fc from 'fast-check';

/**
 * Property tests draw the same examples in every run: a change is judged by what it does, not by
 * luck. Longer campaigns with other seeds are run by hand: `FC_SEED=123 npm run test:unit`.
 */
fc.configureGlobal({ ...fc.readConfigureGlobal(), seed: Number(process.env.FC_SEED ?? 20817) });
