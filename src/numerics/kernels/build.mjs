// Compiles assembly/kernels.ts to WebAssembly and writes it, as text that any script can carry, to wasmCode.ts.
import { writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import asc from 'assemblyscript/asc';

const folder = fileURLToPath(new URL('.', import.meta.url));
const { error, stderr, binary } = await compile();
if (error) {
  console.error(stderr);
  process.exit(1);
}
const text = Buffer.from(binary).toString('base64');
writeFileSync(
  `${folder}wasmCode.ts`,
  `/** The compiled kernels (${binary.length} bytes), base64. Written by build.mjs. */\nexport const WASM_CODE =\n  '${text}';\n`,
);

async function compile() {
  let binary;
  const result = await asc.main(
    [
      'assembly/kernels.ts',
      '--baseDir',
      folder,
      '--outFile',
      'kernels.wasm',
      '--runtime',
      'stub',
      '--enable',
      'simd',
      '--importMemory',
      '--noAssert',
      '-O3',
    ],
    {
      writeFile: (_name, contents) => {
        binary = contents;
      },
    },
  );
  return { error: result.error, stderr: result.stderr.toString(), binary };
}
