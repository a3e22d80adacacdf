"""A plan on the map: its depots, customers and flows handed to the map widget."""
