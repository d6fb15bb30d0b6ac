"""The rooms of the pipeline: what combines radiometry, heat, anomalies, geometry and assessment for one frame."""
