/** Who wears what. The first row that names a worker's own number beats the row of the job. */
export interface DemoAssignment {
  /** Employee numbers, or a job. */
  who: readonly string[] | string;
  inner: string;
  outer?: string;
  /** A task or an area; everywhere unless said. */
  task?: string;
  /** From the first day on unless said. */
  fromDaysAgo?: number;
  toDaysAgo?: number;
}

export const ASSIGNMENTS: readonly DemoAssignment[] = [
  // Test cell: foam holds the low end; a muff over the ears is for those who can't wear it. Teardown needs much less.
  { who: ["3315", "3340", "3371", "3388", "3411", "3425", "3984", "3985", "4002", "4005", "4011", "4016"], inner: "Alder foam" },
  { who: ["3402", "3993", "3367"], inner: "Fenmuff" },
  { who: ["3390"], inner: "Heron custom" },
  { who: ["3315", "3340", "3371", "3388", "3390", "3402", "3411", "3425", "3352", "3991", "3984", "3985", "3993", "4002", "4005", "4011", "4016"], inner: "Sedge band", task: "Teardown" },
  // Wren active has its place in the soak run: with the active part off it is just enough, with it on one hears the engine.
  { who: ["3352", "3991"], inner: "Alder foam" },
  { who: ["3352", "3991"], inner: "Wren active", task: "Soak run", fromDaysAgo: 150 },

  // Fettling: everything is above 500 Hz, and any good cup will do.
  { who: ["4403", "4408", "4422", "4425", "4120", "4121", "4130", "4133", "4137"], inner: "Fenmuff low" },
  { who: ["4417", "4419", "4126"], inner: "Marsh cap" },
  { who: ["4431", "4128"], inner: "Rush level" },
  { who: ["4433"], inner: "Curlew headset" },
  { who: ["4440"], inner: "Willow plug" },
  { who: ["4442", "4447", "4144", "4139"], inner: "Sedge band" },

  // Kettle Bend.
  { who: ["2875", "2877", "2884"], inner: "Fenmuff" },
  { who: ["2880"], inner: "Fenmuff low" },
  { who: ["2890", "2891", "2893", "2896"], inner: "Willow plug" },
  { who: ["2899", "2903", "2907", "2911"], inner: "Sedge band" },
  { who: ["2951", "2953", "2954"], inner: "Fenmuff low" },
  { who: ["2960", "2961", "2964", "2966", "2970"], inner: "Sedge band" },
];
