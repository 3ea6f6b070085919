"""One coil being wound: the only room with threads.

snapshot  what a screen may look at, made from the folded facts
outlook   the forecast from here to the stop, for drawing
journal   the thread that makes facts durable, and the small protocol of the log it writes to
requests  what somebody may ask of a run
answers   the facts that follow from a request, or why it cannot be met
runner    the thread that owns the port and alone decides
wind      a coil from recipe to seal; and going on with one
outcome   what a run hands back
"""
