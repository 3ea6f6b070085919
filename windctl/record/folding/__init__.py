"""What the facts of each subject do to the state, where it takes more than a line: one module for each of
`windctl.record.events`, under the same name. `windctl.record.fold` calls them.
"""
