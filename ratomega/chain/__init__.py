"""The chains from a case to a result: ``job`` makes a case ready, each other module spells out one chain."""
