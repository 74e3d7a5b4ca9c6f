"""Parts of the generator of the invented demo town; `make_demo_town` puts them together."""
