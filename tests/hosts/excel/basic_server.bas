Rem Attribute VBA_ModuleType=VBAClassModule
Option VBASupport 1
Option ClassModule
Option Explicit

Function CallUDF(moduleName As String, functionName As String, sent As Variant) As Variant
    Dim told As String, n As Long
    If Lost > 0 Then
        Lost = Lost - 1
        Err.Raise 1000, "server", "the process has ended"
    End If
    told = moduleName & "." & functionName
    For n = LBound(sent) To UBound(sent)
        If IsArray(sent(n)) Then
            told = told & " [" & UBound(sent(n), 1) & "x" & UBound(sent(n), 2) & "]"
        ElseIf VarType(sent(n)) = 10 Then
            told = told & " omitted"
        Else
            told = told & " " & Replace(CStr(sent(n)), Chr(10), ";")
        End If
    Next n
    CallUDF = told
End Function
