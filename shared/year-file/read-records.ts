/** Text of bytes that come in pieces. */
async function* textOf(bytes: AsyncIterable<Uint8Array>): AsyncGenerator<string> {
  const decoder = new TextDecoder("utf-8", { ignoreBOM: false });
  for await (const piece of bytes) yield decoder.decode(piece, { stream: true });
  yield decoder.decode();
}

/** Lines that are not empty. */
export async function* readLines(bytes: AsyncIterable<Uint8Array>): AsyncGenerator<string> {
  let rest = "";
  for await (const text of textOf(bytes)) {
    const lines = (rest + text).split("\n");
    rest = lines.pop() ?? "";
    for (const line of lines) if (line !== "") yield line;
  }
  if (rest !== "") yield rest;
}

/** Records of a CSV (RFC 4180), the head included. */
export async function* readRecords(bytes: AsyncIterable<Uint8Array>): AsyncGenerator<string[]> {
  let record: string[] = [];
  let field = "";
  let isQuoted = false;
  let wasQuote = false;
  let isEmpty = true;
  for await (const text of textOf(bytes)) {
    for (const character of text) {
      if (isQuoted && !wasQuote) {
        if (character === '"') wasQuote = true;
        else field += character;
        continue;
      }
      if (wasQuote) {
        wasQuote = false;
        if (character === '"') {
          field += '"';
          continue;
        }
        isQuoted = false;
      }
      if (character === '"') isQuoted = true;
      else if (character === ",") {
        record.push(field);
        field = "";
      } else if (character === "\n") {
        record.push(field);
        yield record;
        record = [];
        field = "";
        isEmpty = true;
        continue;
      } else if (character !== "\r") field += character;
      isEmpty = false;
    }
  }
  if (!isEmpty) yield [...record, field];
}
