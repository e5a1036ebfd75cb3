// Moves bytes between the page and the engine; knows nothing else. wasm_exec.js stands before it in the same script.
declare const Go: new () => { importObject: WebAssembly.Imports; run(i: WebAssembly.Instance): Promise<void> };
const scope = globalThis as unknown as DedicatedWorkerGlobalScope & {
  engineReceive?: (bytes: Uint8Array) => void;
  enginePost?: (bytes: Uint8Array<ArrayBuffer>) => void;
  enginePause?: (wake: () => void) => void;
};

const channel = new MessageChannel();
const waiting: (() => void)[] = [];
channel.port1.onmessage = () => waiting.shift()?.();
scope.enginePause = (wake) => {
  waiting.push(wake);
  channel.port2.postMessage(0);
};
scope.enginePost = (bytes) => scope.postMessage(bytes, [bytes.buffer]);

const early: Uint8Array[] = [];
scope.onmessage = async (e: MessageEvent<WebAssembly.Module | Uint8Array>) => {
  if (e.data instanceof Uint8Array) {
    if (scope.engineReceive) scope.engineReceive(e.data);
    else early.push(e.data);
    return;
  }
  const go = new Go();
  const instance = await WebAssembly.instantiate(e.data, go.importObject);
  void go.run(instance).then(() => scope.postMessage("ended"));
  for (const bytes of early.splice(0)) scope.engineReceive?.(bytes);
};

export {};
