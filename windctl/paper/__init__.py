"""What goes onto paper: reports, labels and charts as text.

Plain facts in, HTML or SVG out; no clock, no files.

svg    the pieces of a drawing: lines, marks, texts, and the document around them
plot   axes and a plot: values in, drawing out
"""
