"""What the shop's own coils have taught, and what that says of the next one. Pure functions.

basis       what a coil was believed to be before anything was learnt: all deviations are relative to it
keys        which coils share a bobbin or a lay
lesson      what was measured of one finished coil
gaussian    a Gaussian belief about named unknowns
unknowns    which unknowns there are, how far they stray, and how a measurement depends on them
spool       what is known of a spool of wire by itself
fold        lessons in order -> what is known; withdrawing a lesson is folding without it
outlook     what is known -> the next coil's core and growth terms, with their covariance
"""
