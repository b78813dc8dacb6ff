// Arrays that the page holds as base64 of little-endian numbers.
const KINDS = {
  u1: Uint8Array, i1: Int8Array, u2: Uint16Array, i4: Int32Array, f4: Float32Array, f8: Float64Array,
};

function numbers(block) {
  const text = atob(block.bytes);
  const bytes = new Uint8Array(text.length);
  for (let i = 0; i < text.length; i++) bytes[i] = text.charCodeAt(i);
  return new KINDS[block.kind](bytes.buffer);
}
