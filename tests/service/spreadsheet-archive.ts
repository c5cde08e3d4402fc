import { deflateRawSync } from 'node:zlib';

interface Part {
  readonly name: string;
  readonly content: Uint8Array;
  /** The size it claims to unpack to, where that is a lie. */
  readonly claimed?: number;
}

/** A ZIP archive of parts, whose sizes may be lies. */
export function archiveOf(parts: readonly Part[]): Uint8Array {
  const bodies: Buffer[] = [];
  const directory: Buffer[] = [];
  let offset = 0;
  for (const { name, content, claimed = content.length } of parts) {
    const packed = deflateRawSync(content, { level: 9 });
    const fields = Buffer.alloc(26);
    fields.writeUInt16LE(20, 0);
    fields.writeUInt16LE(8, 4);
    fields.writeUInt32LE(packed.length, 14);
    fields.writeUInt32LE(claimed, 18);
    fields.writeUInt16LE(Buffer.byteLength(name), 22);
    const local = Buffer.concat([Buffer.from('PK\x03\x04', 'latin1'), fields, Buffer.from(name)]);
    const rest = Buffer.alloc(14);
    rest.writeUInt32LE(offset, 10);
    const head = Buffer.concat([Buffer.from('PK\x01\x02', 'latin1'), Buffer.from([20, 0]), fields]);
    directory.push(Buffer.concat([head, rest, Buffer.from(name)]));
    bodies.push(local, packed);
    offset += local.length + packed.length;
  }
  const central = Buffer.concat(directory);
  const end = Buffer.alloc(22);
  end.write('PK\x05\x06', 0, 'latin1');
  end.writeUInt16LE(parts.length, 8);
  end.writeUInt16LE(parts.length, 10);
  end.writeUInt32LE(central.length, 12);
  end.writeUInt32LE(offset, 16);
  return Buffer.concat([...bodies, central, end]);
}
