"""The command line: words in, text or JSON out; what is done is in `lumentrace.study`."""
