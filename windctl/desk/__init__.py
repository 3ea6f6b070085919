"""What every face needs before it can show anything: which machine, which book, how numbers are written.

asked      what one call of windctl was told, whichever face it came by
places     where settings, profiles and the log lie
machines   the profile that is meant
books      the coil book that is meant
bench      the port, and what only the outermost shell knows of the world
going_on   which open coil is meant, and the machine it was begun on
words      what a person may say to a run, and the requests it means
numbers    how numbers are written for people
log        faults of the program itself
"""
