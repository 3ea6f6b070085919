"""One drawing or panel each. None of them forecasts, talks to a port or writes a book."""
