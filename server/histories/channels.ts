import type { ChannelKind } from "../../shared/acoustics/history";
import type { HistoryChannel } from "../../shared/schemas/history";

/** What the arithmetic calls a channel. */
export const kindOf = (channel: HistoryChannel): ChannelKind =>
  channel === "lzpeak" ? "zpeak" : channel;

export const channelOf = (kind: ChannelKind): HistoryChannel =>
  kind === "zpeak" ? "lzpeak" : kind;
