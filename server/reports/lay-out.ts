import PDFDocument from "pdfkit";
import type { Verdict } from "../../shared/acoustics/types";
import type { Block, Cell, Column, Ink, LineLook, Pencil, Report } from "./blocks";
import { type Script, typefaces } from "./fonts";
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
      Title: report.title,
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
  private readonly root: Structure;
  private readonly widths = new Map<string, number>();

  constructor(
    private readonly doc: Doc,
    private readonly report: Report,
  ) {
    for (const [script, typeface] of Object.entries(typefaces()))
      doc.registerFont(script, typeface as never);
    this.root = doc.struct("Document");
    doc.addStructure(this.root);
    this.addPage();
  }

  async write(): Promise<void> {
    const { title, lead, blocks } = this.report;
    this.rule(TOP - 12, 2.2);
    this.paragraph("H1", title, { sizePt: SIZES.title }, 3);
    this.paragraph("P", lead, { sizePt: SIZES.lead }, 10);
    for (const block of blocks) await this.block(block);
    this.root.end();
    this.feet();
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
        this.paragraph("H2", block.text, { sizePt: SIZES.heading, isStrong: true }, 4);
        return;
      case "text":
        this.paragraph(
          "P",
          block.text,
          { sizePt: SIZES.text, ink: block.isQuiet ? "muted" : "ink" },
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
    }
  }

  private width(text: string, script: Script, sizePt: number): number {
    const key = `${sizePt} ${script} ${text}`;
    const known = this.widths.get(key);
    if (known !== undefined) return known;
    const width = this.doc.font(script).fontSize(sizePt).widthOfString(text);
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
    let at = x;
    for (const { text, script } of line.runs) {
      doc.font(script).fontSize(sizePt).fillColor(INKS[ink]);
      if (isStrong) doc.strokeColor(INKS[ink]).lineWidth(STRONG_LINE_PT);
      doc.text(text, at, y, { lineBreak: false, fill: true, stroke: isStrong ?? false });
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

  /** A marked part of the page under a structure. */
  private marked(parent: Structure, tag: string, draw: () => void): void {
    parent.add(this.doc.markStructureContent(tag));
    draw();
    this.doc.endMarkedContent();
  }

  private paragraph(tag: string, text: string, look: Look, afterPt: number): void {
    const structure = this.doc.struct(tag);
    this.root.add(structure);
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
    const height = lineHeight(SIZES.text);
    const list = this.doc.struct("L");
    this.root.add(list);
    for (const [label, value] of rows) {
      const labels = this.lines(label, labelWidth - GAP, SIZES.text);
      const values = this.lines(value, WIDTH - labelWidth, SIZES.text);
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
            this.draw(line, x, this.y + index * height, { sizePt: SIZES.text, ink });
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
  }: Extract<Block, { kind: "table" }>): Promise<void> {
    if (rows.length === 0) {
      this.paragraph("P", empty, { sizePt: SIZES.text, ink: "muted" }, 6);
      return;
    }
    const placed = placeColumns(columns);
    const structure = this.doc.struct("Table", { alt: summary });
    this.root.add(structure);
    this.make(60);
    this.tableHead(placed, structure);
    for (const [index, row] of rows.entries()) {
      this.tableRow(placed, row, structure, index === rows.length - 1);
      if (index % ROWS_AT_ONCE === 0) await others();
    }
    structure.end();
    this.rule(this.y, 1);
    this.y += 9;
  }

  /** The first names the columns to who hears the table read; on the pages after it it is only seen. */
  private tableHead(columns: readonly PlacedColumn[], table: Structure | null): void {
    const height = lineHeight(SIZES.cell);
    const heads = columns.map(({ head, widthPt }) => this.lines(head, widthPt, SIZES.cell));
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
            sizePt: SIZES.cell,
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
    isLast: boolean,
  ): void {
    const laid = columns.map((column, index) => this.layCell(column, cells[index] ?? ""));
    const most = Math.max(...laid.map(({ lines }) => lines.length));
    const height = lineHeight(SIZES.cell);
    // A row stands on one page, unless it is longer than one.
    if (this.y + most * height + 6 > BOTTOM) {
      this.rule(this.y, 0.8);
      this.addPage();
      this.tableHead(columns, null);
    }
    const row = this.doc.struct("TR");
    table.add(row);
    const structures = laid.map(() => this.doc.struct("TD"));
    for (const structure of structures) row.add(structure);
    for (let done = 0; done < most; ) {
      const fit = Math.min(most - done, Math.max(1, Math.floor((BOTTOM - this.y) / height)));
      for (const [index, { column, lines, look, verdict, verdictLine }] of laid.entries()) {
        const part = lines.slice(done, done + fit);
        this.marked(structures[index]!, "TD", () => {
          for (const [place, line] of part.entries()) {
            const isVerdict = verdict !== undefined && done + place === verdictLine;
            const y = this.y + place * height;
            if (isVerdict) this.shape(verdict, column.x, y + 1.6);
            this.draw(line, startOf(column, line) + (isVerdict ? SHAPE_PT : 0), y, look);
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
    this.y += 3;
    if (!isLast) this.rule(this.y, 0.5, "hair");
    this.y += isLast ? 0 : 3;
  }

  private layCell(column: PlacedColumn, given: string | Cell) {
    const cell: Cell = typeof given === "string" ? { lines: given.split("\n") } : given;
    const look: Look = {
      sizePt: column.isId ? SIZES.id : SIZES.cell,
      ink: column.isId ? "muted" : "ink",
      isStrong: cell.isStrong,
    };
    let verdictLine = -1;
    const lines = cell.lines.flatMap((text, index) => {
      const isVerdict = cell.verdict !== undefined && index === (cell.verdictLine ?? 0);
      const room = column.widthPt - (isVerdict ? SHAPE_PT : 0);
      const laid = this.lines(text, room, look.sizePt);
      return laid.map((line, place) => ({ line, isVerdict: isVerdict && place === 0 }));
    });
    verdictLine = lines.findIndex(({ isVerdict }) => isVerdict);
    return {
      column,
      look,
      verdict: cell.verdict,
      verdictLine,
      lines: lines.map(({ line }) => line),
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
    this.root.add(figure);
    const look = { sizePt: SIZES.foot, ink: "muted" } as const;
    const pencil: Pencil = {
      widthPt: WIDTH,
      line: (x1, y1, x2, y2, how) => this.stroke(LEFT + x1, top + y1, LEFT + x2, top + y2, how),
      box: (x, y, width, height, ink) =>
        void this.doc.rect(LEFT + x, top + y, width, height).fill(INKS[ink]),
      text: (text, x, y, align = "left") => {
        const runs = runsOf(text);
        const widthPt = this.measure(look.sizePt)(runs);
        const back = align === "left" ? 0 : align === "right" ? widthPt : widthPt / 2;
        this.draw({ runs, widthPt }, LEFT + x - back, top + y, look);
      },
    };
    this.marked(figure, "Figure", () => draw(pencil));
    figure.end();
    this.y = top + heightPt + 6;
  }

  private feet(): void {
    const { foot, pageOf } = this.report;
    const { count } = this.doc.bufferedPageRange();
    const look: Look = { sizePt: SIZES.foot, ink: "muted" };
    const height = lineHeight(SIZES.foot);
    for (let page = 0; page < count; page += 1) {
      this.doc.switchToPage(page);
      const number = this.lines(pageOf(page + 1, count), WIDTH, SIZES.foot)[0]!;
      this.artifact(() => {
        this.stroke(LEFT, FOOT_TOP, LEFT + WIDTH, FOOT_TOP, { widthPt: 0.8 });
        for (const [index, text] of foot.entries()) {
          const [line] = this.lines(text, WIDTH - number.widthPt - GAP, SIZES.foot);
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
