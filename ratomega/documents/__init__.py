"""Results as JSON and back; ``results.py`` is the door, each other module the document of one kind or their pieces."""
