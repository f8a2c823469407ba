"""acsolve: exact solutions of linear AC circuits."""
