import { type DataType, type Field, type TimeUnit, Type, type Vector } from "apache-arrow";

/** A cell of a result, as JSON and a text table can hold it. NaN and infinities stay numbers here. */
export type Value = number | string | boolean | null | Value[] | { [key: string]: Value };

/**
 * Turns a cell of an Arrow column into a plain value: integers beyond 2^53 as text (exact), dates and times in ISO 8601
 * (time stamps in UTC), lists as arrays, structs and maps as objects, binary as hex.
 */
export function plainValue(type: DataType, cell: unknown): Value {
  if (cell === null || cell === undefined) return null;
  switch (type.typeId) {
    case Type.Dictionary:
      return plainValue((type as unknown as { dictionary: DataType }).dictionary, cell);
    case Type.Decimal:
      return decimalValue(cell as Uint32Array, (type as unknown as { scale: number }).scale);
    case Type.Date:
      return isoText(Number(cell)).replace(/T.*$/, "");
    case Type.Timestamp:
      return isoText(Number(cell));
    case Type.Time:
      return timeText(cell as number | bigint, (type as unknown as { unit: TimeUnit }).unit);
    case Type.List:
    case Type.FixedSizeList:
      return Array.from(cell as Vector, (item) => plainValue(type.children[0]!.type, item));
    case Type.Struct:
      return Object.fromEntries(
        type.children.map((f) => [f.name, plainValue(f.type, (cell as Record<string, unknown>)[f.name])]),
      );
    case Type.Map: {
      const [key, value] = type.children[0]!.type.children.map((f: Field) => f.type) as [DataType, DataType];
      return Object.fromEntries(
        [...cell as Iterable<[unknown, unknown]>].map((
          [k, v],
        ) => [String(plainValue(key, k)), plainValue(value, v)]),
      );
    }
    case Type.Interval:
      // The decoder reads months, days and nanoseconds as two numbers: what it gives is wrong.
      throw new RangeError('Cannot give an interval: cast it to text, such as "CAST(x AS VARCHAR)"');
    case Type.Binary:
      return Array.from(cell as Uint8Array, (byte) => byte.toString(16).padStart(2, "0")).join("");
  }
  if (typeof cell === "bigint") return integerValue(cell);
  return typeof cell === "number" || typeof cell === "boolean" ? cell : String(cell);
}

function integerValue(value: bigint): Value {
  const number = Number(value);
  return Number.isSafeInteger(number) ? number : String(value);
}

/** Two's complement in little-endian words, to be divided by 10^scale. Sums of integers come with scale 0. */
function decimalValue(words: Uint32Array, scale: number): Value {
  let value = 0n;
  for (let i = words.length - 1; i >= 0; i--) value = (value << 32n) | BigInt(words[i]!);
  value = BigInt.asIntN(32 * words.length, value);
  return scale === 0 ? integerValue(value) : Number(`${value}e-${scale}`);
}

/** Milliseconds since 1970 → ISO 8601, cut to milliseconds; beyond the calendar of Date, the number as text. */
function isoText(ms: number): string {
  return Math.abs(ms) <= 8.64e15 ? new Date(ms).toISOString() : String(ms);
}

function timeText(cell: number | bigint, unit: TimeUnit): string {
  const perSecond = [1, 1e3, 1e6, 1e9][unit]!;
  return new Date(Number(cell) / perSecond * 1e3).toISOString().slice(11, 23);
}
