"""The plant: the physical world behind a board. Knows the board's signals only, no estimator, no plan."""
