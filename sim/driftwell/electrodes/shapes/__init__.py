"""All kinds of shapes an electrode may have."""
