"""What has been published: regressions, which measurement each method uses, and the forecast of all side by side."""
