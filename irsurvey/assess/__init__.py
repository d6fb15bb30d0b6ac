"""From numbers to severity: criteria as data files, conformity, electrical components, findings, conditions."""
