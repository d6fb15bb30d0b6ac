"""From a temperature map to regions: noise, reference area, segmentation and measures of shape."""
