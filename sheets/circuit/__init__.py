"""The circuit: graph, laws on arrays, solver, plant states and what a step does to them."""
