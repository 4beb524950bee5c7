"""`python -m chainsim` does what the command `chainsim` does."""

from chainsim.cli.main import main

if __name__ == "__main__":
    main()
