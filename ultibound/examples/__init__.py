"""Example claims and data of an invented scenario: a two-legged carrier of seedling trays in a hillside nursery."""
