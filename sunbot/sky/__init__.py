"""Weather above the site: a site's source (file, climate, clear sky) in, whole years of `Weather` out."""
