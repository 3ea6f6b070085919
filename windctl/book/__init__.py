"""The coil book: one SQLite file that keeps every coil, in words a program can check.

places      where the book lies when nobody says otherwise
tables      the tables, in types that PostgreSQL takes as well
store       one file: connections, transactions, and the only place where SQLite's errors become ours
ledger      which schema a file has, and the way forward from an older one
schema_3    the way from schema 2 to 3
lease       one live writer per coil
heads       a coil's row and the seal that closes its record
writer      one coil being written: durable on return, each row tied to all before it
query       the language in which coils are looked for, pure
search      a query in SQL
words       what a search for free text looks through
queries     lists and look-ups, in SQL
logs        what is said later of a closed coil, and what is known of a spool: chains of their own
shelf       spools, addenda, and the lessons of all coils in order
check       does one coil's record agree with itself?
verify      the same for the coils of a book, and for the book as a whole
export      one coil as plain data, lossless
exchange    many coils in a file, from one book to another
imports     which coils came from elsewhere, and which numbers were passed over for them
claims      digests that paper and files carry, and the book held against them
backup      the whole book to another file and back
book        the whole, as the rest of the program sees it
open        a path becomes a book

A book is tamper-evident, not tamper-proof: whoever alters, cuts or deletes a stored fact is found out by
`verify`, unless all digests after it are computed anew as well. Keep the record digest of a coil elsewhere (a
label, a delivery note), and that is found out too.
"""
