"""The claim as a map: symbolic linearisation and programs over boxes."""
