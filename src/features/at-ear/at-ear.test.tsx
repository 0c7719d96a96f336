import { fireEvent, render, screen, within } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { expect, test, vi } from "vitest";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { AtEarView, type MethodRow } from "../../../shared/schemas/at-ear";
import { TestLanguage, testI18n } from "../../lib/test-i18n";
import { ActiveInNoise, whichCounts } from "./active-in-noise";
import { BandLevels } from "./band-levels";
import { DelayGain } from "./delay-gain";
import { MethodsTable, SpreadLine } from "./methods-table";
import { batteryOf, NominalDays } from "./nominal-days";
import { Programme } from "./programme";

const flat = (db: number) => [db, db, db, db, db, db, db, db];
const id = "00000000-0000-4000-8000-000000000001";

const method = (of: Partial<MethodRow>): MethodRow => ({
  method: "snr",
  protectedPct: null,
  derating: null,
  reachedBy: null,
  startsFrom: "lc",
  atEarDb: null,
  reductionDb: null,
  wasClamped: false,
  reason: null,
  isOfRule: true,
  governs: false,
  ...of,
});

/** Read by the schema that the server presents, so that it can't drift from a reply. */
const view = (of: object = {}): AtEarView =>
  AtEarView.parse({
    task: { id, name: "Run-up", siteId: id, siteName: "Ostmere works" },
    level: { levelDb: 100, lcMinusLaDb: 2, octaveBandsDb: flat(90) },
    inner: {
      modelId: id,
      name: "Tern active",
      kind: "active-earmuff",
      bands: { meanDb: flat(24), sdDb: flat(4) },
      active: {
        attenuationDb: [12, 15, 18, 10, 2, -3, 0, 0],
        delayS: null,
        gain: null,
        maximumDb: null,
        bandwidthHz: null,
        saturatesAboveDb: null,
        batteryMin: 300,
      },
    },
    outer: null,
    worker: null,
    ruleSetKey: "uk-2005",
    ruleSetVersion: 1,
    creditsActivePart: false,
    methods: [
      method({
        method: "octave-band",
        protectedPct: 84,
        atEarDb: 84,
        reductionDb: 16,
        governs: true,
      }),
      method({ atEarDb: 78, reductionDb: 22 }),
      method({ method: "own-fit", reason: "no-attenuation-data" }),
    ],
    spreadDb: 6,
    isSpreadLarge: true,
    whileWorn: {
      offDb: 84,
      onDb: 80,
      mostDb: null,
      word: "just-enough",
      wordOn: "good",
      reason: null,
    },
    limit: { levelDb: 87, kind: "limit" },
    days: [
      {
        jobId: id,
        jobName: "Test hand",
        lengthMin: 480,
        wornMin: 390,
        atEarDb: 83,
        atEarBound: "exact",
        atEarActiveDb: 79,
        atEarAsWorkedDb: 80.4,
        mostAudioDb: 85.1,
        audioReason: null,
      },
    ],
    ...of,
  });

function show(children: React.ReactNode) {
  return render(
    <MemoryRouter>
      <TestLanguage>{children}</TestLanguage>
    </MemoryRouter>,
  );
}

test("every method has its figure or its reason, the one that governs is named", () => {
  show(<MethodsTable view={view()} state="ready" error={null} onRetry={() => undefined} />);
  const row = screen.getByRole("row", { name: /Octave-band, 84 % protected/ });
  expect(within(row).getByText("84.0")).toBeTruthy();
  expect(within(row).getByText("governs")).toBeTruthy();
  expect(
    screen.getByText("Not assessed: a fit is a worker’s own: open this for a worker"),
  ).toBeTruthy();
});

test("a large spread is a sentence of warning, a small one a remark", () => {
  const { rerender } = show(<SpreadLine view={view()} />);
  expect(screen.getByText(/lie 6\.0 dB apart/)).toBeTruthy();
  rerender(
    <TestLanguage>
      <SpreadLine view={view({ spreadDb: 2, isSpreadLarge: false })} />
    </TestLanguage>,
  );
  expect(screen.getByText("2.0 dB between the methods as the rule set counts them.")).toBeTruthy();
});

test("the band in which the part adds noise is said, with both totals and which counts", () => {
  const seen = view();
  show(<ActiveInNoise view={seen} active={seen.inner.active!} />);
  expect(screen.getByText("2000 Hz +3.0 dB: there it is louder with the part on")).toBeTruthy();
  expect(screen.getByText("84.0 dB(A), Just enough")).toBeTruthy();
  expect(screen.getByText("80.0 dB(A), Good")).toBeTruthy();
  expect(screen.getByText(/^The part off: this site gives/)).toBeTruthy();
});

test("without a spectrum there is no chart but its reason", () => {
  const seen = view({
    level: { levelDb: 100, lcMinusLaDb: 2, octaveBandsDb: null },
    whileWorn: {
      offDb: 84,
      onDb: null,
      mostDb: null,
      word: null,
      wordOn: null,
      reason: "no-spectrum",
    },
  });
  show(<ActiveInNoise view={seen} active={seen.inner.active!} />);
  expect(screen.getByText("Why: no octave bands were measured.")).toBeTruthy();
});

test("the part on counts for a worker with a passed check, where the site gives credit", () => {
  const i18n = testI18n();
  const worker = {
    id,
    name: "D. Tavernor",
    ownFitDb: null,
    labelLess7Db: null,
    activeCheckPassed: true,
    audioDb: null,
  };
  const of = (creditsActivePart: boolean, who: AtEarView["worker"]) =>
    whichCounts(i18n, { creditsActivePart, worker: who });
  expect(of(true, worker)).toMatch(/^The part on while the battery lasts/);
  expect(of(true, { ...worker, activeCheckPassed: false })).toMatch(/^The part off: no passed/);
  expect(of(true, null)).toMatch(/^The part off; the part on only/);
  expect(of(false, worker)).toMatch(/^The part off: this site/);
});

test("delay and gain are pushed or typed, and what can’t be read changes nothing", () => {
  const seen = view();
  show(<DelayGain view={seen} active={seen.inner.active!} />);
  expect(screen.getByText(/nothing here is stored/)).toBeTruthy();
  const slider = screen.getByRole("slider", { name: "Delay" });
  const field = screen.getByRole<HTMLInputElement>("textbox", { name: "Delay, typed" });
  fireEvent.change(slider, { target: { value: "0" } });
  expect(field.value).toBe("0");
  // A gain of 0.95 leaves a twentieth of the wave: 26.0 dB.
  expect(screen.getByText("In Run-up the part would take 26.0 dB further off.")).toBeTruthy();
  expect(screen.getByText("It breaks even nowhere.")).toBeTruthy();
  fireEvent.change(field, { target: { value: "1000" } });
  expect(screen.getByText(/would be .* dB louder at the ear than with the part off/)).toBeTruthy();
  expect(slider.getAttribute("aria-valuetext")).toMatch(/µs$/);
  fireEvent.change(field, { target: { value: "late" } });
  expect(field.getAttribute("aria-invalid")).toBe("true");
  expect(field.value).toBe("late");
  expect(screen.getByText(/would be .* dB louder/)).toBeTruthy();
  fireEvent.click(screen.getByRole("button", { name: "Back to the start" }));
  expect(field.value).toBe("50");
});

test("at gain 0 the part does nothing, and is not said to add noise", () => {
  const seen = view();
  show(<DelayGain view={seen} active={seen.inner.active!} />);
  const field = screen.getByRole<HTMLInputElement>("textbox", { name: "Gain, typed" });
  fireEvent.change(field, { target: { value: "0" } });
  expect(screen.getByText(/^At gain 0 the active part does nothing/)).toBeTruthy();
  expect(screen.queryByText(/breaks even at|would take|louder/)).toBeNull();
  expect(document.querySelector(".at-ear-even")).toBeNull();
});

test("what a stored gain of 0 credits ends nowhere, for it does nothing", () => {
  const seen = view();
  const active = { ...seen.inner.active!, attenuationDb: null, delayS: 0.0001, gain: 0 };
  show(<ActiveInNoise view={seen} active={active} />);
  expect(screen.getByText("at gain 0 the active part does nothing")).toBeTruthy();
});

test.each([300, 340, 460])(
  "at %i px no figure of added noise lies on a bar or on another",
  (px) => {
    vi.stubGlobal(
      "ResizeObserver",
      class {
        constructor(readonly callback: (entries: object[]) => void) {}
        observe() {
          this.callback([{ contentRect: { width: px } }]);
        }
        disconnect() {}
      },
    );
    const bands = OCTAVE_BANDS_HZ.map((frequencyHz) => ({
      frequencyHz,
      outsideDb: 110,
      passiveDb: 80,
      activeDb: 90,
      outsideADb: 110,
      passiveADb: 80,
      activeADb: 90,
      gainDb: -10,
      addsNoise: true,
    }));
    show(<BandLevels bands={bands} title="Bands" />);
    vi.unstubAllGlobals();
    const of = (element: Element, name: string) => Number(element.getAttribute(name));
    const figures = [...document.querySelectorAll(".at-ear-added-figure")];
    const highest = Math.min(...[...document.querySelectorAll("rect")].map((bar) => of(bar, "y")));
    expect(figures).toHaveLength(8);
    for (const figure of figures) expect(of(figure, "y")).toBeLessThan(highest - 3);
    // "+10.0" is under 40 px wide; a figure after the next stands on its line again.
    for (const [at, figure] of figures.entries())
      for (const other of figures.slice(at + 1))
        if (of(figure, "y") === of(other, "y"))
          expect(of(other, "x") - of(figure, "x")).toBeGreaterThan(40);
  },
);

test("a programme adds by energy to what is left of the noise", () => {
  show(<Programme view={view()} />);
  const field = screen.getByLabelText("Programme under the cup");
  fireEvent.change(field, { target: { value: "84" } });
  // Twice 84 dB are 87.0 dB; 80 and 84 are 85.5.
  expect(screen.getByText(/87\.0 dB\(A\) with the part off, 85\.5 with it on/)).toBeTruthy();
  fireEvent.change(field, { target: { value: "400" } });
  expect(screen.getByText("A level from 20 to 120 dB(A).")).toBeTruthy();
});

test("the hours with the battery alive and dead stand beside the day as worked", () => {
  expect(batteryOf(300, 390)).toEqual({ aliveMin: 300, deadMin: 90 });
  expect(batteryOf(300, 240)).toEqual({ aliveMin: 240, deadMin: 0 });
  expect(batteryOf(null, 240)).toBeNull();
  show(<NominalDays view={view()} />);
  const row = screen.getByRole("row", { name: /Test hand/ });
  expect(row.textContent).toMatch(/5\sh alive, 1\sh\s30\smin dead/);
  expect(within(row).getByText("80.4")).toBeTruthy();
  expect(within(row).getByText("85.1")).toBeTruthy();
});
