"""The command line: parses and prints, computes nothing.

One module per command. At the top of a module stand only the standard library, click, rich-free
helpers of this folder and `chainsim.errors`; all else is imported in the function that needs it,
so that `chainsim --help` answers at once.
"""
