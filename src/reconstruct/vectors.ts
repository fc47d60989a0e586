export { delayVectors, type VectorShape } from '../recording/vectors.ts';
