/** `leadspan/node`: the edges only Node has, reading recordings from files and writing results whole. */
export { type ReadOptions, type ReadRecording, readRecording } from './read-recording.ts';
export { writeWhole } from './write-file.ts';
