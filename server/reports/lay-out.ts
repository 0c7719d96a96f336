import PDFDocument from "pdfkit";
import type { Verdict } from "../../shared/acoustics/types";
import type { Block, Cell, Column, Ink, LineLook, Pencil, Report, Sheet } from "./blocks";
import { type Script, typeface } from "./fonts";
import { type Line, linesOf, type Run, runsOf } from "./letters-on-paper";

type Doc = InstanceType<typeof PDFDocument>;
type Structure = ReturnType<Doc["struct"]>;

/** A4, places in points. */
const PAGE = { width: 595.28, height: 841.89 };
const LEFT = 48;
const TOP = 52;
const WIDTH = PAGE.width - 2 * LEFT;
const FOOT_TOP = PAGE.height - 52;
const BOTTOM = FOOT_TOP - 12;
const GAP = 8;

const SIZES = { title: 20, heading: 12.5, lead: 11, text: 9.5, cell: 8.5, id: 6.2, foot: 7.5 };
/** For a reader who stands in a shop and not at a desk. */
const LARGE_SIZES: typeof SIZES = {
  ...SIZES,
  title: 26,
  heading: 14,
  lead: 12.5,
  text: 11.5,
  cell: 10.5,
};
/** The letters come in one weight: a thin line round them makes them stronger. */
const STRONG_LINE_PT = 0.26;

/** Black on white as a printer has it; the one colour says what the protector does. */
const INKS: Readonly<Record<Ink, string>> = {
  ink: "#211D17",
  muted: "#5B5346",
  hair: "#CDC3AE",
  bar: "#1F7568",
  pale: "#B3D3C8",
};

interface Look {
  readonly sizePt: number;
  readonly ink?: Ink;
  readonly isStrong?: boolean;
}

const lineHeight = (sizePt: number) => sizePt * 1.35;

/** Makes pages of a report: tagged, with its own letters, a foot on each. Nothing in it depends on when it runs. */
export async function layOut(report: Report): Promise<Doc> {
  const doc = new PDFDocument({
    size: "A4",
    margin: 0,
    pdfVersion: "1.7",
    // What the type lacks: the name of the part of ISO 14289 that the file keeps to.
    subset: "PDF/UA",
    tagged: true,
    lang: report.language,
    displayTitle: true,
    bufferPages: true,
    autoFirstPage: false,
    font: null,
    info: {
      Title: report.fileTitle ?? report.title,
      Author: report.author,
      Creator: "Dinward",
      Producer: "Dinward",
      CreationDate: report.madeAt,
    },
  } as unknown as ConstructorParameters<typeof PDFDocument>[0]);
  await new Pages(doc, report).write();
  doc.end();
  return doc;
}

class Pages {
  private y = TOP;
  private sizes = SIZES;
  private readonly root: Structure;
  /** The sheet's part of the document, to which blocks are added. */
  private part: Structure;
  /** Number of the first page of each sheet, from 0. */
  private readonly firstPages: number[] = [];
  private readonly registered = new Set<Script>();
  private readonly widths = new Map<string, number>();

  constructor(
    private readonly doc: Doc,
    private readonly report: Report,
  ) {
    this.root = doc.struct("Document");
    this.part = this.root;
    doc.addStructure(this.root);
  }

  async write(): Promise<void> {
    const sheets = [this.report, ...(this.report.more ?? [])];
    for (const sheet of sheets) await this.sheet(sheet);
    this.root.end();
    for (const [index, sheet] of sheets.entries())
      this.feet(sheet, this.firstPages[index]!, this.firstPages[index + 1]);
  }

  private async sheet({ language, title, lead, blocks, isLarge }: Sheet): Promise<void> {
    this.firstPages.push(this.doc.bufferedPageRange().count);
    this.addPage();
    this.sizes = isLarge ? LARGE_SIZES : SIZES;
    this.part = this.doc.struct("Sect", { lang: language });
    this.root.add(this.part);
    this.rule(TOP - 12, 2.2);
    this.paragraph("H1", title, { sizePt: this.sizes.title }, 3);
    this.paragraph("P", lead, { sizePt: this.sizes.lead }, 10);
    for (const block of blocks) await this.block(block);
    this.part.end();
  }

  private addPage(): void {
    this.doc.addPage({ size: "A4", margin: 0 });
    this.y = TOP;
  }

  /** Begins a page where there is no room for so much. */
  private make(roomPt: number): void {
    if (this.y + roomPt > BOTTOM) this.addPage();
  }

  private async block(block: Block): Promise<void> {
    switch (block.kind) {
      case "heading":
        // Not alone at the foot of a page.
        this.make(64);
        this.y += 8;
        this.paragraph("H2", block.text, { sizePt: this.sizes.heading, isStrong: true }, 4);
        return;
      case "text":
        this.paragraph(
          "P",
          block.text,
          { sizePt: this.sizes.text, ink: block.isQuiet ? "muted" : "ink" },
          5,
        );
        return;
      case "facts":
        this.facts(block.rows);
        return;
      case "table":
        await this.table(block);
        return;
      case "picture":
        this.picture(block);
        return;
      case "checks":
        this.checks(block.rows);
        return;
      case "blanks":
        this.blanks(block);
        return;
      case "room":
        this.make(block.heightPt + GAP);
        this.artifact(() => this.frame(LEFT, this.y, WIDTH, block.heightPt, 0.6));
        this.y += block.heightPt + GAP;
        return;
    }
  }

  private font(script: Script, sizePt: number): Doc {
    if (!this.registered.has(script)) {
      this.doc.registerFont(script, typeface(script) as never);
      this.registered.add(script);
    }
    return this.doc.font(script).fontSize(sizePt);
  }

  private width(text: string, script: Script, sizePt: number): number {
    const key = `${sizePt} ${script} ${text}`;
    const known = this.widths.get(key);
    if (known !== undefined) return known;
    const width = this.font(script, sizePt).widthOfString(text);
    this.widths.set(key, width);
    return width;
  }

  private measure =
    (sizePt: number) =>
    (runs: readonly Run[]): number =>
      runs.reduce((sum, { text, script }) => sum + this.width(text, script, sizePt), 0);

  private lines(text: string, widthPt: number, sizePt: number): Line[] {
    return linesOf(text, widthPt, this.measure(sizePt));
  }

  /** One line of text into whatever is marked now. */
  private draw(line: Line, x: number, y: number, { sizePt, ink = "ink", isStrong }: Look): void {
    const { doc } = this;
    const { ascent, unitsPerEm } = typeface("latin");
    let at = x;
    for (const { text, script } of line.runs) {
      this.font(script, sizePt).fillColor(INKS[ink]);
      if (isStrong) doc.strokeColor(INKS[ink]).lineWidth(STRONG_LINE_PT);
      // All stand on the line of the first typeface, whatever their own has above it.
      const baseline = (-ascent / unitsPerEm) * sizePt;
      doc.text(text, at, y, { lineBreak: false, fill: true, stroke: isStrong ?? false, baseline });
      at += this.width(text, script, sizePt);
    }
  }

  /** Draws what says nothing to who hears the page read. */
  private artifact(draw: () => void, type: "Layout" | "Pagination" = "Layout"): void {
    this.doc.markContent("Artifact", { type });
    draw();
    this.doc.endMarkedContent();
  }

  private rule(y: number, widthPt: number, ink: Ink = "ink"): void {
    this.artifact(() => this.stroke(LEFT, y, LEFT + WIDTH, y, { ink, widthPt }));
  }

  private stroke(
    x1: number,
    y1: number,
    x2: number,
    y2: number,
    { ink = "ink", widthPt = 1, dash }: LineLook = {},
  ): void {
    const { doc } = this;
    doc.save().moveTo(x1, y1).lineTo(x2, y2).lineWidth(widthPt).strokeColor(INKS[ink]);
    if (dash) doc.dash(dash[0], { space: dash[1] });
    doc.stroke().restore();
  }

  private frame(x: number, y: number, width: number, height: number, linePt: number): void {
    this.doc.lineWidth(linePt).strokeColor(INKS.ink).rect(x, y, width, height).stroke();
  }

  /** A marked part of the page under a structure. */
  private marked(parent: Structure, tag: string, draw: () => void): void {
    parent.add(this.doc.markStructureContent(tag));
    draw();
    this.doc.endMarkedContent();
  }

  private paragraph(tag: string, text: string, look: Look, afterPt: number): void {
    const structure = this.doc.struct(tag);
    this.part.add(structure);
    const height = lineHeight(look.sizePt);
    let rest = this.lines(text, WIDTH, look.sizePt);
    while (rest.length > 0) {
      this.make(height);
      const fitting = rest.slice(0, Math.max(1, Math.floor((BOTTOM - this.y) / height)));
      this.marked(structure, tag, () => {
        for (const line of fitting) {
          this.draw(line, LEFT, this.y, look);
          this.y += height;
        }
      });
      rest = rest.slice(fitting.length);
    }
    structure.end();
    this.y += afterPt;
  }

  private facts(rows: readonly (readonly [string, string])[]): void {
    const labelWidth = WIDTH * 0.34;
    const height = lineHeight(this.sizes.text);
    const list = this.doc.struct("L");
    this.part.add(list);
    for (const [label, value] of rows) {
      const labels = this.lines(label, labelWidth - GAP, this.sizes.text);
      const values = this.lines(value, WIDTH - labelWidth, this.sizes.text);
      this.make(Math.min(8, Math.max(labels.length, values.length)) * height + 3);
      const item = this.doc.struct("LI");
      list.add(item);
      const [labelled, body] = [this.doc.struct("Lbl"), this.doc.struct("LBody")];
      item.add(labelled).add(body);
      this.rowOfLines(
        [
          { structure: labelled, tag: "Lbl", x: LEFT, lines: labels, ink: "muted" },
          { structure: body, tag: "LBody", x: LEFT + labelWidth, lines: values, ink: "ink" },
        ],
        height,
      );
      labelled.end();
      body.end();
      item.end();
      this.y += 3;
      this.rule(this.y - 2, 0.5, "hair");
    }
    list.end();
    this.y += 5;
  }

  /** Texts side by side; what is longer than a page goes on on the next. */
  private rowOfLines(
    texts: readonly { structure: Structure; tag: string; x: number; lines: Line[]; ink: Ink }[],
    height: number,
  ): void {
    const most = Math.max(...texts.map(({ lines }) => lines.length));
    for (let done = 0; done < most; ) {
      this.make(height);
      const fit = Math.min(most - done, Math.max(1, Math.floor((BOTTOM - this.y) / height)));
      for (const { structure, tag, x, lines, ink } of texts) {
        const part = lines.slice(done, done + fit);
        if (part.length === 0) continue;
        this.marked(structure, tag, () => {
          for (const [index, line] of part.entries())
            this.draw(line, x, this.y + index * height, { sizePt: this.sizes.text, ink });
        });
      }
      this.y += fit * height;
      done += fit;
    }
  }

  private async table({
    summary,
    columns,
    rows,
    empty,
    isForm = false,
  }: Extract<Block, { kind: "table" }>): Promise<void> {
    if (rows.length === 0) {
      this.paragraph("P", empty, { sizePt: this.sizes.text, ink: "muted" }, 6);
      return;
    }
    const placed = placeColumns(columns);
    const structure = this.doc.struct("Table", { alt: summary });
    this.part.add(structure);
    this.make(60);
    this.tableHead(placed, structure);
    for (const [index, row] of rows.entries()) {
      this.tableRow(placed, row, structure, { isLast: index === rows.length - 1, isForm });
      if (index % ROWS_AT_ONCE === 0) await others();
    }
    structure.end();
    this.rule(this.y, 1);
    this.y += 9;
  }

  /** The first names the columns to who hears the table read; on the pages after it it is only seen. */
  private tableHead(columns: readonly PlacedColumn[], table: Structure | null): void {
    const height = lineHeight(this.sizes.cell);
    const heads = columns.map(({ head, widthPt }) => this.lines(head, widthPt, this.sizes.cell));
    const most = Math.max(...heads.map(({ length }) => length));
    this.rule(this.y, 1.6);
    const top = this.y + 4;
    const row = table && this.doc.struct("TR");
    if (row) table.add(row);
    for (const [index, column] of columns.entries()) {
      const draw = () => {
        const lines = heads[index]!;
        const down = (most - lines.length) * height;
        for (const [place, line] of lines.entries())
          this.draw(line, startOf(column, line), top + down + place * height, {
            sizePt: this.sizes.cell,
            ink: "muted",
          });
      };
      if (!row) this.artifact(draw, "Pagination");
      else {
        const head = this.doc.struct("TH", { scope: "Column" } as object);
        row.add(head);
        this.marked(head, "TH", draw);
        head.end();
      }
    }
    row?.end();
    this.y = top + most * height + 3;
    this.rule(this.y, 0.8);
    this.y += 3;
  }

  private tableRow(
    columns: readonly PlacedColumn[],
    cells: readonly (string | Cell)[],
    table: Structure,
    { isLast, isForm }: { isLast: boolean; isForm: boolean },
  ): void {
    const laid = columns.map((column, index) => this.layCell(column, cells[index] ?? ""));
    const most = Math.max(...laid.map(({ lines }) => lines.length));
    const height = lineHeight(this.sizes.cell);
    const tallPt = Math.max(
      isForm ? FORM_ROW_PT : 0,
      ...laid.map(({ lines, picture }) => lines.length * height + (picture?.heightPt ?? 0)),
    );
    // A row stands on one page, unless it is longer than one.
    if (this.y + tallPt + 6 > BOTTOM) {
      this.rule(this.y, 0.8);
      this.addPage();
      this.tableHead(columns, null);
    }
    const row = this.doc.struct("TR");
    table.add(row);
    const structures = laid.map(() => this.doc.struct("TD"));
    for (const structure of structures) row.add(structure);
    const top = this.y;
    for (const { column, picture } of laid)
      if (picture) this.artifact(() => picture.draw(this.pencil(column.x, top, column.widthPt)));
    if (isForm)
      this.artifact(() => {
        for (const { x } of columns.slice(1))
          this.stroke(x - GAP / 2, top - 3, x - GAP / 2, top + tallPt + 3, {
            ink: "hair",
            widthPt: 0.5,
          });
      });
    for (let done = 0; done < most; ) {
      const fit = Math.min(most - done, Math.max(1, Math.floor((BOTTOM - this.y) / height)));
      for (const [index, cell] of laid.entries()) {
        const { column, lines, look, picture, strong, verdict, verdictLine } = cell;
        const part = lines.slice(done, done + fit);
        const under = done === 0 ? (picture?.heightPt ?? 0) : 0;
        this.marked(structures[index]!, "TD", () => {
          for (const [place, line] of part.entries()) {
            const isVerdict = verdict !== undefined && done + place === verdictLine;
            const y = this.y + under + place * height;
            if (isVerdict) this.shape(verdict, column.x, y + 1.6);
            this.draw(line, startOf(column, line) + (isVerdict ? SHAPE_PT : 0), y, {
              ...look,
              isStrong: strong[done + place],
            });
          }
        });
      }
      this.y += fit * height;
      done += fit;
      if (done < most) {
        this.addPage();
        this.tableHead(columns, null);
      }
    }
    for (const structure of structures) structure.end();
    row.end();
    if (this.y > top) this.y = Math.max(this.y, top + tallPt);
    this.y += 3;
    if (!isLast) this.rule(this.y, 0.5, "hair");
    this.y += isLast ? 0 : 3;
  }

  private layCell(column: PlacedColumn, given: string | Cell) {
    const cell: Cell = typeof given === "string" ? { lines: given.split("\n") } : given;
    const look: Look = {
      sizePt: column.isId ? this.sizes.id : this.sizes.cell,
      ink: column.isId ? "muted" : "ink",
    };
    const isStrong = (index: number) =>
      cell.isStrong === "first line" ? index === 0 : (cell.isStrong ?? false);
    let verdictLine = -1;
    const lines = cell.lines.flatMap((text, index) => {
      const isVerdict = cell.verdict !== undefined && index === (cell.verdictLine ?? 0);
      const room = column.widthPt - (isVerdict ? SHAPE_PT : 0);
      const laid = this.lines(text, room, look.sizePt);
      return laid.map((line, place) => ({
        line,
        isStrong: isStrong(index),
        isVerdict: isVerdict && place === 0,
      }));
    });
    verdictLine = lines.findIndex(({ isVerdict }) => isVerdict);
    return {
      column,
      look,
      picture: cell.picture,
      verdict: cell.verdict,
      verdictLine,
      lines: lines.map(({ line }) => line),
      strong: lines.map((line) => line.isStrong),
    };
  }

  /** The four verdicts' shapes, as on screen: the upright is the criterion. */
  private shape(verdict: Verdict, x: number, y: number): void {
    const { doc } = this;
    doc.save().translate(x, y).scale(0.55).strokeColor(INKS.ink).fillColor(INKS.ink);
    if (verdict === "under") {
      doc.lineWidth(1.8).circle(5.2, 7, 3.7).stroke();
      doc.lineWidth(1.4).moveTo(12.5, 1.2).lineTo(12.5, 12.8).stroke();
    } else if (verdict === "over") {
      doc.lineWidth(1.4).moveTo(2.6, 1).lineTo(2.6, 13).stroke();
      doc.polygon([5, 2.2], [14.6, 7], [5, 11.8]).fill();
    } else if (verdict === "cant-tell-yet") {
      doc.lineWidth(1.5).polygon([7.5, 1.4], [13, 7], [7.5, 12.6], [2, 7]).stroke();
      doc.polygon([7.5, 1.4], [13, 7], [7.5, 12.6]).fill();
    } else doc.lineWidth(1.4).dash(2.2, { space: 2.12 }).circle(7.5, 7, 5.5).stroke();
    doc.restore();
  }

  private picture({ alt, heightPt, draw }: Extract<Block, { kind: "picture" }>): void {
    this.make(heightPt + 6);
    const top = this.y;
    const figure = this.doc.struct("Figure", {
      alt,
      bbox: [LEFT, top, LEFT + WIDTH, top + heightPt],
    } as object);
    this.part.add(figure);
    this.marked(figure, "Figure", () => draw(this.pencil(LEFT, top, WIDTH)));
    figure.end();
    this.y = top + heightPt + 6;
  }

  private pencil(left: number, top: number, widthPt: number): Pencil {
    const look = { sizePt: this.sizes.foot, ink: "muted" } as const;
    return {
      widthPt,
      line: (x1, y1, x2, y2, how) => this.stroke(left + x1, top + y1, left + x2, top + y2, how),
      box: (x, y, width, height, ink) =>
        void this.doc.rect(left + x, top + y, width, height).fill(INKS[ink]),
      shape: (corners, ink) =>
        void this.doc.polygon(...corners.map(([x, y]) => [left + x, top + y])).fill(INKS[ink]),
      text: (text, x, y, align = "left") => {
        const runs = runsOf(text);
        const textPt = this.measure(look.sizePt)(runs);
        const back = align === "left" ? 0 : align === "right" ? textPt : textPt / 2;
        this.draw({ runs, widthPt: textPt }, left + x - back, top + y, look);
      },
    };
  }

  private checks(rows: Extract<Block, { kind: "checks" }>["rows"]): void {
    const { doc } = this;
    const height = lineHeight(this.sizes.text);
    const list = doc.struct("L");
    this.part.add(list);
    for (const { text, answers = [] } of rows) {
      const indentPt = answers.length === 0 ? TICK_PT + 8 : 0;
      const answersPt = answers.length * ANSWER_PT;
      const lines = this.lines(text, WIDTH - indentPt - answersPt, this.sizes.text);
      this.make(lines.length * height + 6);
      const [item, body] = [doc.struct("LI"), doc.struct("LBody")];
      list.add(item);
      item.add(body);
      if (answers.length === 0) this.tick(LEFT, this.y + (height - TICK_PT) / 2, false);
      this.marked(body, "LBody", () => {
        for (const [index, line] of lines.entries())
          this.draw(line, LEFT + indentPt, this.y + index * height, { sizePt: this.sizes.text });
      });
      for (const [index, { text: answer, isTicked }] of answers.entries()) {
        const x = LEFT + WIDTH - answersPt + index * ANSWER_PT;
        this.tick(x, this.y + (height - TICK_PT) / 2, isTicked);
        // Who hears it read is told by a sign which of them is ticked.
        const span = doc.struct("Span", { actual: `${isTicked ? "☒" : "☐"} ${answer}` });
        body.add(span);
        const [line] = this.lines(answer, ANSWER_PT - TICK_PT, this.sizes.text);
        this.marked(span, "Span", () => {
          if (line) this.draw(line, x + TICK_PT + 5, this.y, { sizePt: this.sizes.text });
        });
        span.end();
      }
      body.end();
      item.end();
      this.y += lines.length * height + 3;
      if (answers.length > 0) this.rule(this.y - 1, 0.5, "hair");
      this.y += 2;
    }
    list.end();
    this.y += 5;
  }

  private tick(x: number, y: number, isTicked: boolean): void {
    this.artifact(() => {
      this.frame(x, y, TICK_PT, TICK_PT, 0.9);
      if (!isTicked) return;
      const [left, top, right, bottom] = [x + 2, y + 2, x + TICK_PT - 2, y + TICK_PT - 2];
      this.stroke(left, top, right, bottom);
      this.stroke(left, bottom, right, top);
    });
  }

  private blanks({ blanks, roomPt }: Extract<Block, { kind: "blanks" }>): void {
    const between = 20;
    const widthPt = (WIDTH - between * (blanks.length - 1)) / blanks.length;
    const height = lineHeight(this.sizes.cell);
    const laid = blanks.map(({ label, value = "" }, index) => ({
      x: LEFT + index * (widthPt + between),
      label: this.lines(label, widthPt, this.sizes.cell),
      value: value === "" ? [] : this.lines(value, widthPt, this.sizes.text),
    }));
    const most = (name: "label" | "value") => Math.max(...laid.map((one) => one[name].length));
    const above = Math.max(roomPt, most("value") * lineHeight(this.sizes.text) + 4);
    this.make(above + most("label") * height + 8);
    const line = this.y + above;
    for (const { x, label, value } of laid) {
      this.artifact(() => this.stroke(x, line, x + widthPt, line, { widthPt: 0.8 }));
      const paragraph = this.doc.struct("P");
      this.part.add(paragraph);
      this.marked(paragraph, "P", () => {
        for (const [index, one] of label.entries())
          this.draw(one, x, line + 2 + index * height, { sizePt: this.sizes.cell, ink: "muted" });
        for (const [index, one] of value.entries())
          this.draw(one, x, line - (value.length - index) * lineHeight(this.sizes.text), {
            sizePt: this.sizes.text,
          });
      });
      paragraph.end();
    }
    this.y = line + most("label") * height + 8;
  }

  private feet({ foot, pageOf }: Sheet, first: number, next?: number): void {
    const count = (next ?? this.doc.bufferedPageRange().count) - first;
    const look: Look = { sizePt: this.sizes.foot, ink: "muted" };
    const height = lineHeight(this.sizes.foot);
    for (let page = 0; page < count; page += 1) {
      this.doc.switchToPage(first + page);
      const number = this.lines(pageOf(page + 1, count), WIDTH, this.sizes.foot)[0]!;
      this.artifact(() => {
        this.stroke(LEFT, FOOT_TOP, LEFT + WIDTH, FOOT_TOP, { widthPt: 0.8 });
        for (const [index, text] of foot.entries()) {
          const [line] = this.lines(text, WIDTH - number.widthPt - GAP, this.sizes.foot);
          if (line) this.draw(line, LEFT, FOOT_TOP + 5 + index * height, look);
        }
        this.draw(number, LEFT + WIDTH - number.widthPt, FOOT_TOP + 5, look);
      }, "Pagination");
    }
  }
}

/** Rows drawn before other requests get their turn. */
const ROWS_AT_ONCE = 10;
const others = () => new Promise((resolve) => setImmediate(resolve));

/** Lowest row of a table to write in, of a box to tick, and how far the answers after a text stand apart. */
const FORM_ROW_PT = 20;
const TICK_PT = 9.5;
const ANSWER_PT = 52;

/** Room of a verdict's shape. */
const SHAPE_PT = 11;

interface PlacedColumn extends Column {
  readonly x: number;
  readonly widthPt: number;
}

function placeColumns(columns: readonly Column[]): PlacedColumn[] {
  const all = columns.reduce((sum, { width }) => sum + width, 0);
  const room = WIDTH - GAP * (columns.length - 1);
  let x = LEFT;
  return columns.map((column) => {
    const placed = { ...column, x, widthPt: (room * column.width) / all };
    x += placed.widthPt + GAP;
    return placed;
  });
}

const startOf = ({ isFigure, x, widthPt }: PlacedColumn, line: Line) =>
  isFigure ? x + widthPt - line.widthPt : x;
