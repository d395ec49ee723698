// Worker threads of Node 20 do not inherit the TypeScript loader of their parent: this sets it up and goes on in TypeScript.
import { register } from 'tsx/esm/api';

register();
await import(new URL('./worker.ts', import.meta.url).href);
