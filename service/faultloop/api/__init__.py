"""HTTP: app factory, gather, one router a resource, problem details."""
