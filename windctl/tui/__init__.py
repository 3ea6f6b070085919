"""The terminal interface.

start      from the command line into the interface and out again
app        the frame: themes, urgent keys, rooms, leaving
session    what the interface does in the world: plans, runs, the book; no screen knows how
view       what is shown of a snapshot, as plain text and numbers; pure
telling    facts in plain words; pure
pictures/  drawings as cells: digits, letters, curve, section, bobbin; pure
widgets/   one drawing or panel each; they place what they are given
screens/   one room each
dialogs/   questions
"""
