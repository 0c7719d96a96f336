import {
  checkYearFile,
  isSound,
  type YearFileReport,
} from "../../shared/year-file/check-year-file";
import { wordsFor } from "./words";

const words = wordsFor(navigator.language);
const count = new Intl.NumberFormat(navigator.language);

type Content = Node | string | null;

/** An element with attributes and what is in it; texts stay texts. */
function make(
  tag: string,
  attributes: Record<string, string> = {},
  ...content: Content[]
): HTMLElement {
  const element = document.createElement(tag);
  for (const [name, value] of Object.entries(attributes)) element.setAttribute(name, value);
  element.append(...content.filter((one) => one !== null));
  return element;
}

function table(
  heads: readonly { text: string; isFigure?: boolean }[],
  lines: Content[][],
): HTMLElement {
  const cell = (tag: string, place: number, content: Content) =>
    make(
      tag,
      { ...(heads[place]?.isFigure && { class: "figure" }), ...(tag === "th" && { scope: "col" }) },
      content,
    );
  return make(
    "div",
    { class: "frame" },
    make(
      "table",
      {},
      make("thead", {}, make("tr", {}, ...heads.map(({ text }, place) => cell("th", place, text)))),
      make(
        "tbody",
        {},
        ...lines.map((line) =>
          make("tr", {}, ...line.map((content, place) => cell("td", place, content))),
        ),
      ),
    ),
  );
}

const pairs = (items: readonly [string, Content][]) =>
  make(
    "dl",
    {},
    ...items.flatMap(([term, value]) => [make("dt", {}, term), make("dd", {}, value)]),
  );

function show(report: YearFileReport): Node[] {
  const { broken, manifest, files, rederived, imported, differing, differingCount } = report;
  const isGood = isSound(report);
  const parts: Content[] = [
    make(
      "p",
      { class: isGood ? "verdict" : "verdict is-bad" },
      broken !== null ? words.broken : isGood ? words.sound : words.unsound,
    ),
    broken !== null ? make("p", {}, `${words.why}: ${broken}.`) : null,
    isGood ? make("p", {}, words.soundMeaning) : null,
    broken === null ? make("p", {}, words.whatNot) : null,
  ];
  if (manifest) {
    const { organization, site, year, madeAt, timeZone, ruleSets, methodVersions, trail } =
      manifest;
    parts.push(
      make("h2", {}, words.facts),
      pairs([
        [words.organization, organization],
        [words.site, `${site}, ${year}`],
        [words.made, `${madeAt} (UTC; ${timeZone})`],
        [
          words.rules,
          ruleSets.map(({ key, version }) => `${key} ${version}`).join(", ") || words.none,
        ],
        [words.methods, methodVersions.join(", ") || words.none],
        [
          words.seal,
          trail
            ? make(
                "span",
                {},
                `${count.format(trail.number)}, `,
                make("code", {}, trail.hash),
                `, ${trail.sealedAt}`,
              )
            : words.none,
        ],
      ]),
    );
  }
  if (broken === null) {
    parts.push(
      make("h2", {}, words.results),
      pairs([
        [words.rederived, count.format(rederived)],
        [words.imported, count.format(imported)],
        [
          words.differing,
          make("span", differingCount > 0 ? { class: "bad" } : {}, count.format(differingCount)),
        ],
      ]),
    );
    if (differing.length > 0)
      parts.push(
        make("h2", {}, words.differences),
        differing.length < differingCount
          ? make(
              "p",
              {},
              words.firstOf(count.format(differing.length), count.format(differingCount)),
            )
          : null,
        table(
          [words.result, words.worker, words.where, words.what].map((text) => ({ text })),
          differing.map(({ id, worker, date, file, problem, fields }) => [
            make("code", {}, id),
            `${worker}, ${date}`,
            file,
            problem !== null
              ? words.problems[problem]
              : fields
                  .map(({ name, stated, derived }) => `${name}: ${stated} → ${derived}`)
                  .join("; "),
          ]),
        ),
      );
    parts.push(
      make("h2", {}, words.files),
      table(
        [{ text: words.file }, { text: words.rows, isFigure: true }, { text: words.state }],
        files.map(({ path, rows, state }) => [
          path,
          rows === null ? "" : count.format(rows),
          make("span", state === "as-stated" ? {} : { class: "bad" }, words.states[state]),
        ]),
      ),
    );
  }
  return parts.filter((part): part is Node => part !== null);
}

document.documentElement.lang = words === wordsFor("de") ? "de" : "en";
document.title = words.title;
const picker = make("input", {
  type: "file",
  id: "file",
  accept: ".zip,application/zip",
}) as HTMLInputElement;
const drop = make("div", { class: "drop" }, make("label", { for: "file" }, words.choose), picker);
const said = make("div", { role: "status", "aria-live": "polite" });
const shown = make("div", { id: "report" });
document
  .getElementById("main")
  ?.append(make("h1", {}, words.title), make("p", {}, words.lead), drop, said, shown);

let latest = 0;
async function check(file: File): Promise<void> {
  latest += 1;
  const own = latest;
  shown.replaceChildren();
  const tell = (share: number) => {
    if (own === latest) said.textContent = words.checking(count.format(Math.floor(100 * share)));
  };
  tell(0);
  const report = await checkYearFile(file, tell);
  if (own !== latest) return;
  said.textContent = "";
  const [verdict, ...rest] = show(report);
  said.append(verdict!);
  shown.replaceChildren(...rest);
}

picker.addEventListener("change", () => {
  const [file] = picker.files ?? [];
  if (file) void check(file);
});
// Anywhere on the page: a file that misses the frame would otherwise be opened in its place.
document.addEventListener("dragover", (event) => {
  event.preventDefault();
  drop.classList.add("is-over");
});
document.addEventListener("dragleave", () => drop.classList.remove("is-over"));
document.addEventListener("drop", (event) => {
  event.preventDefault();
  drop.classList.remove("is-over");
  const [file] = event.dataTransfer?.files ?? [];
  if (file) void check(file);
});
