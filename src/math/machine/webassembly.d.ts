/** What is used of the JavaScript interface of WebAssembly (W3C, WebAssembly JavaScript Interface, 2022). */
declare namespace WebAssembly {
  class Memory {
    constructor(limits: { readonly initial: number });
    readonly buffer: ArrayBuffer;
  }
  class Module {
    constructor(bytes: Uint8Array<ArrayBuffer>);
  }
  class Instance {
    constructor(module: Module, imports: Readonly<Record<string, Readonly<Record<string, unknown>>>>);
    readonly exports: Readonly<Record<string, unknown>>;
  }
}
