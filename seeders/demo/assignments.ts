/** What people wear from their first day on; the story changes it. */
export interface DemoAssignment {
  /** Employee numbers. */
  who: readonly string[];
  inner: string;
  /** Everywhere unless a task is named. */
  task?: string;
  /** The last day, where it ended. */
  toDaysAgo?: number;
}

export const ASSIGNMENTS: readonly DemoAssignment[] = [
  // Test cell: foam holds the low end; a muff is for those who can't wear it. Teardown needs much less than the runs.
  { who: ["3315", "3340", "3352", "3367", "3371", "3388", "3411"], inner: "Alder foam" },
  { who: ["3984", "3985", "3991", "4002", "4005", "4011", "4016"], inner: "Alder foam" },
  { who: ["3318", "3402", "3982", "3993"], inner: "Fenmuff" },
  { who: ["3390"], inner: "Heron custom" },
  {
    who: ["3315", "3340", "3352", "3367", "3371", "3388", "3390", "3402", "3411"],
    inner: "Sedge band",
    task: "Teardown",
  },
  {
    who: ["3984", "3985", "3991", "3993", "4002", "4005", "4011", "4016"],
    inner: "Sedge band",
    task: "Teardown",
  },
  // R. Szabó's came with the agency, whose loan ended yesterday.
  { who: ["3425"], inner: "Alder foam", toDaysAgo: 1 },
  { who: ["3425"], inner: "Sedge band", task: "Teardown", toDaysAgo: 1 },

  // Fettling: nearly everything is above 500 Hz, and any good cup will do.
  {
    who: ["4403", "4408", "4417", "4422", "4120", "4121", "4130", "4133", "4137"],
    inner: "Fenmuff low",
  },
  { who: ["4419", "4425", "4126"], inner: "Marsh cap" },
  { who: ["4431", "4128"], inner: "Rush level" },
  { who: ["4433"], inner: "Curlew headset" },
  { who: ["4440"], inner: "Willow plug" },
  { who: ["4442", "4447", "4139", "4144"], inner: "Sedge band" },

  // Kettle Bend.
  { who: ["2875", "2877", "2884"], inner: "Fenmuff" },
  { who: ["2880"], inner: "Fenmuff low" },
  { who: ["2890", "2891", "2893", "2896"], inner: "Willow plug" },
  { who: ["2899", "2903", "2907", "2911"], inner: "Sedge band" },
  { who: ["2951", "2953", "2954"], inner: "Fenmuff low" },
  { who: ["2960", "2961", "2964", "2966", "2970"], inner: "Sedge band" },
];
