"""The board's twin: what the firmware's core does, tick for tick, in integers. Knows only the protocol."""
