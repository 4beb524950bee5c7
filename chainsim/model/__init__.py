"""Parts of a lift: the route of the chain, forms of teeth and pockets, equilibrium, packing."""
