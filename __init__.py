"""Full-size templates and cutting decisions for the flat web in a twisted composite wing."""

__version__ = "0.1.0"
