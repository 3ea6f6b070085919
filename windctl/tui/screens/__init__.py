"""One room of the interface each."""
