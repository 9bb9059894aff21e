from django.urls import URLPattern

app_name = "theories"
urlpatterns: list[URLPattern] = []
