"""The drawings to be cut, on paper and for machines."""
