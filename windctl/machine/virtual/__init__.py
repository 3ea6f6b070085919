"""The virtual machine: the board's twin and the plant put together, and how a host reaches them."""
