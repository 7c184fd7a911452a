const TABLE = (() => {
  const table = new Uint32Array(256);
  for (let i = 0; i < 256; i++) {
    let value = i;
    for (let bit = 0; bit < 8; bit++) value = value & 1 ? (value >>> 1) ^ 0xedb88320 : value >>> 1;
    table[i] = value;
  }
  return table;
})();

/**
 * CRC-32 (polynomial 0x04C11DB7, reflected, initial and final value all ones), as in ISO-HDLC and
 * ITU-T V.42.
 * @param before  the CRC of the bytes so far, 0 at the start
 */
export function crc32(bytes: Uint8Array, before = 0): number {
  let value = ~before >>> 0;
  for (let i = 0; i < bytes.length; i++) value = TABLE[(value ^ bytes[i]) & 0xff] ^ (value >>> 8);
  return ~value >>> 0;
}
