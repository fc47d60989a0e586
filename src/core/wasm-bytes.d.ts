declare module '*.wasm' {
  const bytes: Uint8Array<ArrayBuffer>;
  export default bytes;
}

declare module '*.worker.txt' {
  const source: string;
  export default source;
}
