from django.urls import URLPattern

app_name = "measurements"
urlpatterns: list[URLPattern] = []
