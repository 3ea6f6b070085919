"""What goes onto paper: reports, labels and charts as text.

Plain facts in, HTML or SVG out; no clock, no files.

svg, plot, html, look   the pieces of a drawing, a plot with axes, the pieces of a page, its style
gather, history, course, layers, recorded, told   a record's facts, made ready to be shown
charts, winding, measured, proof   the parts of a report
report, batch, label    whole pages
control_chart, compared   drawings of several coils
"""
