"""Drawings made of character cells: pure functions from numbers to cells, tested without a terminal."""
