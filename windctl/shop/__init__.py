"""Questions about coils as such, beyond the one being wound. Pure functions.

mixture       the distribution of a figure that depends on which of several things is true
unknown_coil  what a finished coil of unknown make is wound with
rewind        a recipe that would make its like
"""
