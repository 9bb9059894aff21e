from django.urls import URLPattern

app_name = "overviews"
urlpatterns: list[URLPattern] = []
