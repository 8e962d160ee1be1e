"""The command line: densities in, densities out, without writing Python."""
