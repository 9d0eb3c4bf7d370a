"""python -m mixind"""

from mixind.cli import main

main(prog_name="mixind")
