/** The rigs' chance is that of the signal room: seeded, the same on every machine. */
export * from '../signal/random.ts';
