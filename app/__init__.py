"""The desk in the browser, and the command line."""
