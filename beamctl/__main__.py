"""`python -m beamctl`."""

from beamctl.cli import main

if __name__ == "__main__":
    main(prog_name="beamctl")
