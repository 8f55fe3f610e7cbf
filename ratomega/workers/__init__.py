"""Many cores, many machines: the work cut into chunks, the hands that do them, the store that keeps what is done.

A chunk is a small frozen description that says what to compute (``chunks``; ``charges`` has those of the direct sum);
its result is a text (``texts``). Hands run chunks somewhere (``hands``, ``pool``, ``cluster``); a crew gives them out,
collects the results in order and keeps them (``crew``, ``store``). Only ``charges`` knows what a chunk computes.
"""
