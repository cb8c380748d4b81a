"""Pictures as plain functions of arrays, and the HTML reports made of them."""
