"""The tests; ``python3 -m tests`` makes an environment of its own and runs all of them."""
