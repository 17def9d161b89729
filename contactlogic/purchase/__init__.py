"""From a design to what must be bought: contacts per relay, a parts list, the cheapest purchase."""
