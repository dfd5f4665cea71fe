"""The command line: one file per command; it reads, calls the library, writes and speaks."""
