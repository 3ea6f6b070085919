"""One coil as a fold over its events: what happened, what is known because of it, and what follows from that.

events     the facts, named in past tense, by subject
canonical  their one written form
chain      the digests that tie each fact to all before it
entries    facts as rows: rare ones singly, dense ones in lossless chunks
state      what is known of a coil
fold       state' = fold(state, event), its longer cases in folding, by the same subjects
decide     (events, wants) = decide(state), made of noticing, stopping, ending, consent and wanting
summary    what the coil book's index says of a coil
curve      resistance over turns, thinned for eyes and queries
trace      the digest of a coil's facts without clock and names

Everything here is pure: no clock, no random source, no input or output.
"""
