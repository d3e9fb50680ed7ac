"""The command line: it parses, calls and prints; everything else lives elsewhere."""
