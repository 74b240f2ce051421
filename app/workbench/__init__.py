"""The window: inputs, live plots, ledger table, actions. The only place with widgets."""
