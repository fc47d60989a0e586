// Cosines and sines of a third and of fifths of a turn, rounded once; equal to those of
// src/fallback/fourier.ts (a test compares the transforms bit for bit).
export const SIN_60: f64 = Math.sqrt(3) / 2;
export const COS_72: f64 = (Math.sqrt(5) - 1) / 4;
export const COS_144: f64 = -(Math.sqrt(5) + 1) / 4;
export const SIN_72: f64 = Math.sqrt(10 + 2 * Math.sqrt(5)) / 4;
export const SIN_144: f64 = Math.sqrt(10 - 2 * Math.sqrt(5)) / 4;
