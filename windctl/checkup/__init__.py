"""A machine's check-up: steps a builder goes through with a board, from the greeting to a stop that works.

Sans-I/O: bytes and time in, bytes out, questions and answers as values. Whoever has the port drives it.
"""
